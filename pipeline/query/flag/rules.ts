import { fileURLToPath } from "node:url";
import { z } from "zod";
import { RUN_RULES } from "../../../models/decision/charts/mod.ts";
import { readJsonFile } from "../../json_file.ts";
import { InputError } from "../../../shared/errors.ts";
import { TRAIT_NAMES } from "./facts.ts";

export const SEVERITIES = ["act", "watch", "note"] as const;
export type Severity = typeof SEVERITIES[number];

const severity = z.enum(SEVERITIES);
const trait = z.enum(TRAIT_NAMES);
const traits = z.array(trait).min(1);
const multiple = z.number().positive().max(100);
const share = z.number().gt(0).lt(1);

/** What every rule has. */
const common = {
  rule: z.string().regex(/^[a-z0-9][a-z0-9-]*$/, "need lower-case letters, digits and '-'"),
  off: z.boolean().default(false),
  /** Only lots of this platform. */
  platform: z.string().optional(),
  why: z.string().optional(),
};
const kind = <K extends string, S extends z.ZodRawShape>(name: K, shape: S) =>
  z.strictObject({ kind: z.literal(name), ...common, ...shape });

const traitLimit = kind("trait_limit", {
  trait,
  at_least: z.number().optional(),
  at_most: z.number().optional(),
  above_default_by_u: multiple.optional(),
  below_default_by_u: multiple.optional(),
  /** One-sided confidence with which the mean of a wafer has to be beyond the limit. */
  confidence: share,
  severity,
}).refine(
  (r) =>
    [r.at_least, r.at_most, r.above_default_by_u, r.below_default_by_u].some((limit) => limit !== undefined),
  "need at least one of at_least, at_most, above_default_by_u, below_default_by_u",
);

const figureLimit = kind("figure_limit", {
  figure: z.string().min(1),
  request: z.string().optional(),
  at_least: z.number().optional(),
  at_most: z.number().optional(),
  /** Largest share of a wafer's matched guides that may be beyond the limit. */
  share_beyond: z.number().min(0).lt(1),
  confidence: share,
  severity,
}).refine((r) => r.at_least !== undefined || r.at_most !== undefined, "need at_least, at_most or both");

const ruleSchema = z.union([
  traitLimit,
  figureLimit,
  z.discriminatedUnion("kind", [
    kind("wafer_contrast", { traits, k: multiple, severity }),
    kind("yield_floor", {
      request: z.string().optional(),
      floor: z.number().gt(0).max(1),
      confidence: share,
      severity,
      severity_when_not_certain: severity,
    }),
    kind("no_operating_point", { least_guides: z.int().min(1), severity }),
    kind("coating_off_target", { k: multiple, act_above: share, severity }),
    kind("coating_unknown", { severity }),
    kind("period_off", { tolerance: share, k: multiple, severity }),
    kind("scan_residual", {
      k: multiple,
      least_scans: z.int().min(2),
      severity,
      severity_beyond_platform: severity,
    }),
    kind("reading_remarks", { codes: z.record(z.string(), severity) }),
    kind("repeated_readings", { traits, k: multiple, severity }),
    kind("outcome_residual", { k: multiple, severity }),
    kind("unlisted_cut", { severity }),
    kind("coverage_thin", { least_dies: z.int().min(1), severity }),
    kind("quarantine", { watch_above_share: z.number().min(0).max(1), severity }),
    kind("lot_chart", {
      traits,
      yields: z.boolean(),
      least_earlier_lots: z.int().min(2),
      run_rules: z.partialRecord(
        z.enum(Object.keys(RUN_RULES) as [keyof typeof RUN_RULES, ...(keyof typeof RUN_RULES)[]]),
        severity,
      ),
    }),
    kind("spread_growth", { traits, alpha: share, least_ratio: z.number().min(1), severity }),
  ]),
]);
export type Rule = z.infer<typeof ruleSchema>;
export type RuleOf<K extends Rule["kind"]> = Extract<Rule, { kind: K }>;

export const rulesSchema = z.strictObject({
  $schema: z.string().optional(),
  about: z.string().optional(),
  rules: z.array(ruleSchema),
}).superRefine(({ rules }, context) => {
  const seen = new Set<string>();
  for (const [k, { rule }] of rules.entries()) {
    if (seen.has(rule)) {
      context.addIssue({
        code: "custom",
        path: ["rules", k, "rule"],
        input: rule,
        message: "this name is given before; need each name once",
      });
    }
    seen.add(rule);
  }
});

const OWN_RULES = fileURLToPath(new URL("../flag_rules.json", import.meta.url));

/**
 * The rules in force: the program's, with those of the user's file in place of their namesakes or behind them.
 * @throws InputError naming file, field and what would be right
 */
export async function loadRules(file?: string): Promise<Rule[]> {
  const { rules } = await readJsonFile(OWN_RULES, rulesSchema, "rules");
  const merged = new Map(rules.map((r) => [r.rule, r]));
  if (file !== undefined) {
    for (const rule of (await readJsonFile(file, rulesSchema, "rules")).rules) merged.set(rule.rule, rule);
  }
  const inForce = [...merged.values()].filter((r) => !r.off);
  if (inForce.length === 0) {
    throw new InputError(`Cannot flag by ${file}: every rule is off; need at least one`);
  }
  return inForce;
}
