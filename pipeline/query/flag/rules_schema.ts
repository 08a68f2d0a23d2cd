import { z } from "zod";
import { RUN_RULES } from "../../../models/decision/charts/mod.ts";
import { didYouMean, nearestWord } from "../../../shared/schemas/nearest.ts";
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
/** What to say of a key that a rule does not have. */
const unknownKeys = (known: readonly string[]) => (issue: { code?: string; keys?: string[] }) =>
  issue.code !== "unrecognized_keys"
    ? undefined
    : issue.keys!.map((key) =>
      `unknown key ${JSON.stringify(key)}${didYouMean(nearestWord(key, known))}; need one of ${
        known.join(", ")
      }`
    ).join("; ");

const kind = <K extends string, S extends z.ZodRawShape>(name: K, shape: S) => {
  const whole = { kind: z.literal(name), ...common, ...shape };
  return z.strictObject(whole, { error: unknownKeys(Object.keys(whole)) as never });
};

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

const KINDS = [
  traitLimit,
  figureLimit,
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
  kind("contradiction", { severity }),
  kind("repeated_readings", { traits, k: multiple, severity }),
  kind("outcome_residual", { k: multiple, severity }),
  kind("unlisted_cut", { severity }),
  kind("coverage_thin", { least_dies: z.int().min(1), severity }),
  kind("quarantine", { watch_above_share: z.number().min(0).max(1), severity }),
  kind("lot_chart", {
    traits,
    yields: z.boolean(),
    least_earlier_lots: z.int().min(2),
    /** Severity of a wafer beyond what wafers of the lots before keep; left out: not flagged. */
    wafers: severity.optional(),
    /** A run rule acts only on a point that is as improbable as this among all charts of the lot; else it is watched. */
    act_alpha: z.number().gt(0).max(1).default(0.0005),
    run_rules: z.partialRecord(
      z.enum(Object.keys(RUN_RULES) as [keyof typeof RUN_RULES, ...(keyof typeof RUN_RULES)[]]),
      severity,
    ),
  }),
  kind("capability", {
    /** Flagged when the whole 95 % interval of cpk lies below. */
    cpk_at_least: z.number().positive().max(10),
    severity,
    /** Watched when it lies below this. */
    watch_below: z.number().min(0).max(10),
  }),
  kind("spread_growth", { traits, alpha: share, least_ratio: z.number().min(1), severity }),
] as const;

/** One rule, whole. */
export const ruleSchema = z.discriminatedUnion("kind", KINDS, {
  error: (issue) =>
    issue.code === "invalid_union"
      ? `found ${JSON.stringify((issue.input as { kind?: unknown } | undefined)?.kind)}, need one of ${
        KINDS.map((k) => k.shape.kind.value).join(", ")
      }`
      : undefined,
});
export type Rule = z.infer<typeof ruleSchema>;
export type RuleOf<K extends Rule["kind"]> = Extract<Rule, { kind: K }>;

/** What of a rule may be given to change one of the program's: its name, and anything but its kind. */
const changes = KINDS.map((k) => {
  const { kind: _, ...shape } = k.shape;
  return z.strictObject(shape).partial().required({ rule: true });
});

const eachNameOnce = ({ rules }: { rules: readonly { rule: string }[] }, context: z.RefinementCtx) => {
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
};

const fileOf = <S extends z.ZodType<{ rule: string }>>(rule: S) =>
  z.strictObject({
    $schema: z.string().optional(),
    about: z.string().optional(),
    rules: z.array(rule),
  }).superRefine(eachNameOnce);

/** The program's own file: every rule whole. */
export const rulesSchema = fileOf(ruleSchema);

/** A user's file as editors check it: rules that are whole, and changes of the program's. */
export const ownRulesSchema = fileOf(
  z.union([ruleSchema, ...changes]) as unknown as z.ZodType<{ rule: string }>,
);

/**
 * A user's file as it is read: an entry without `kind` changes the program's rule of its name, field by field; then every rule
 * is checked whole.
 */
export function changedRulesSchema(base: ReadonlyMap<string, Rule>) {
  const whole = z.preprocess((entry, context) => {
    if (typeof entry !== "object" || entry === null || "kind" in entry || !("rule" in entry)) return entry;
    const held = base.get(String(entry.rule));
    if (held !== undefined) return { ...held, ...entry };
    const near = nearestWord(String(entry.rule), [...base.keys()]);
    context.addIssue({
      code: "custom",
      path: ["rule"],
      input: entry.rule,
      message: `no rule of the program has this name${didYouMean(near)}; need one of its names, or a kind`,
    });
    return z.NEVER;
  }, ruleSchema);
  return fileOf(whole);
}
