import { fileURLToPath } from "node:url";
import { readJsonFile } from "../../json_file.ts";
import { InputError } from "../../../shared/errors.ts";
import { changedRulesSchema, type Rule, rulesSchema } from "./rules_schema.ts";

export type { Rule, RuleOf, Severity } from "./rules_schema.ts";

const OWN_RULES = fileURLToPath(new URL("../flag_rules.json", import.meta.url));

/**
 * The rules in force: the program's, with those of the user's file in place of their namesakes or behind them; an entry
 * without `kind` changes some fields of its namesake.
 * @throws InputError naming file, field and what would be right
 */
export async function loadRules(file?: string): Promise<Rule[]> {
  const { rules } = await readJsonFile(OWN_RULES, rulesSchema, "rules");
  const merged = new Map(rules.map((r) => [r.rule, r]));
  if (file !== undefined) {
    const own = await readJsonFile(file, changedRulesSchema(merged), "rules");
    for (const rule of own.rules) merged.set(rule.rule, rule);
  }
  const inForce = [...merged.values()].filter((r) => !r.off);
  if (inForce.length === 0) {
    throw new InputError(`Cannot flag by ${file}: every rule is off; need at least one`);
  }
  return inForce;
}
