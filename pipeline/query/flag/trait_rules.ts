import { mean, quantileOfSorted } from "../../../shared/statistics.ts";
import { defaultOf } from "../../traits/platform_defaults.ts";
import type { LotFacts } from "./facts.ts";
import type { RuleOf } from "./rules.ts";
import {
  isDefaultTrait,
  oneSided,
  type Series,
  seriesOf,
  seriesWords,
  unitOf,
  type WaferMean,
  waferMeans,
} from "./series.ts";
import { suspectsOfDies } from "./suspects_of.ts";
import { type Flag, mergeRefs, num, plural } from "./types.ts";

export interface Limit {
  readonly side: "above" | "below";
  readonly at: number;
  readonly words: string;
}

/** The limits that a rule sets for a series; those around the platform's default only where it has one. */
export function limitsOf(
  rule: RuleOf<"trait_limit">,
  { trait, polarisation }: Series,
  facts: LotFacts,
): Limit[] {
  const out: Limit[] = [];
  const unit = unitOf(trait);
  if (rule.at_most !== undefined) {
    out.push({ side: "above", at: rule.at_most, words: `the limit ${num(rule.at_most)}${unit}` });
  }
  if (rule.at_least !== undefined) {
    out.push({ side: "below", at: rule.at_least, words: `the limit ${num(rule.at_least)}${unit}` });
  }
  const known = isDefaultTrait(trait) ? defaultOf(facts.platform, trait, polarisation) : null;
  if (known === null) return out;
  const words = (sign: string, k: number) =>
    `the platform's ${num(known.value)} ${sign} ${k} × ${num(known.u)}${unit}`;
  const [up, down] = [rule.above_default_by_u, rule.below_default_by_u];
  if (up !== undefined) out.push({ side: "above", at: known.value + up * known.u, words: words("+", up) });
  if (down !== undefined) {
    out.push({ side: "below", at: known.value - down * known.u, words: words("−", down) });
  }
  return out;
}

/** A wafer whose mean is beyond a limit with the confidence of the rule. */
export function traitLimit(facts: LotFacts, rule: RuleOf<"trait_limit">): Flag[] {
  const found = new Map<string, { wafer: WaferMean; series: Series; limit: Limit; margin: number }[]>();
  const all = seriesOf(facts.traits, [rule.trait], facts.platform);
  for (const series of all) {
    for (const wafer of waferMeans(series)) {
      for (const limit of limitsOf(rule, series, facts)) {
        const bound = oneSided(rule.confidence, wafer.dies.length) * wafer.se;
        const beyond = limit.side === "above" ? wafer.value - limit.at : limit.at - wafer.value;
        if (!(beyond > bound)) continue;
        const held = found.get(wafer.wafer) ?? [];
        held.push({ wafer, series, limit, margin: beyond / Math.max(wafer.se, 1e-300) });
        found.set(wafer.wafer, held);
      }
    }
  }
  return [...found].map(([id, hits]) => {
    const [worst, ...more] = hits.sort((a, b) => b.margin - a.margin);
    const { wafer, series, limit } = worst!;
    const unit = unitOf(series.trait);
    const others = waferMeans(series).filter((w) => w.wafer !== id);
    const sentence =
      `Wafer ${id}: ${seriesWords(series)} is ${num(wafer.value)}${unit} (standard error ${
        num(wafer.se, 2)
      }, ${plural(wafer.dies.length, "die")}), ${limit.side} ${limit.words}` +
      (others.length === 0
        ? ""
        : `; ${others.map((w) => `${w.wafer} has ${num(w.value)}`).slice(0, 4).join(", ")}`) +
      (more.length === 0 ? "" : `; also beyond: ${more.map((m) => seriesWords(m.series)).join(", ")}`);
    return {
      scope: "wafer",
      id,
      lot: facts.lot,
      rule: rule.rule,
      severity: rule.severity,
      brief: hits.map((h) => `${seriesWords(h.series)} ${num(h.wafer.value)}${unitOf(h.series.trait)}`).join(
        ", ",
      ),
      statement: sentence,
      evidence: {
        numbers: {
          trait: series.trait,
          wavelength_nm: series.wavelength_nm,
          value: wafer.value,
          standard_error: wafer.se,
          limit: limit.at,
          dies_read: wafer.dies.length,
        },
        readings: mergeRefs(hits.flatMap((h) => h.wafer.dies.flatMap((d) => d.refs))),
        dies: wafer.dies.map((d) => d.unit),
      },
      suspects: suspectsOfDies(facts, diesOfWafers(facts, new Set(found.keys()))),
    };
  });
}

/** Every die of some wafers: what a wafer went through, all of them went through. */
export const diesOfWafers = (facts: LotFacts, wafers: ReadonlySet<string>): Set<string> =>
  new Set([...facts.design.guidesOfDie].filter(([, g]) => wafers.has(g[0]!.wafer)).map(([die]) => die));

/** A wafer farther from the lot's other wafers than the platform's spread between wafers lets one expect. */
export function waferContrast(facts: LotFacts, rule: RuleOf<"wafer_contrast">): Flag[] {
  const hits = new Map<string, { series: Series; wafer: WaferMean; rest: number; z: number; u: number }>();
  for (const series of seriesOf(facts.traits, rule.traits, facts.platform)) {
    const wafers = waferMeans(series);
    if (wafers.length < 2) continue;
    for (const wafer of wafers) {
      const others = wafers.filter((w) => w !== wafer);
      // The middle of three or more others: one that is out must not make its twins look out.
      const several = others.length >= 3;
      const values = others.map((w) => w.value).sort((x, y) => x - y);
      const rest = several ? quantileOfSorted(values, 0.5) : mean(values);
      const own = Math.hypot(wafer.se, series.spread.waferSd);
      const theirs = Math.hypot(...others.map((w) => Math.hypot(w.se, series.spread.waferSd))) /
        others.length *
        (several ? Math.sqrt(Math.PI / 2) : 1); // what a median of normal values scatters more
      const u = Math.hypot(own, theirs);
      const z = (wafer.value - rest) / u;
      // Of two wafers either is as far from the other: the one farther from the platform's default is out.
      if (!(Math.abs(z) > rule.k) || (wafers.length === 2 && !isFarther(facts, series, wafer, others[0]!))) {
        continue;
      }
      const key = `${wafer.wafer}|${series.trait}`;
      if (Math.abs(z) > Math.abs(hits.get(key)?.z ?? 0)) hits.set(key, { series, wafer, rest, z, u });
    }
  }
  return [...hits.values()].map(({ series, wafer, rest, z, u }) => ({
    scope: "wafer",
    id: wafer.wafer,
    lot: facts.lot,
    rule: rule.rule,
    severity: rule.severity,
    brief: `${seriesWords(series)} ${num(wafer.value)}${unitOf(series.trait)}, other wafers ${num(rest)}`,
    statement:
      `Wafer ${wafer.wafer}: ${seriesWords(series)} is ${num(wafer.value)}${
        unitOf(series.trait)
      }, the lot's other wafers have ${num(rest)}: ${
        num(Math.abs(z), 2)
      } times what the readings and the platform's ` +
      `spread between wafers allow (${num(u, 2)})`,
    evidence: {
      numbers: {
        trait: series.trait,
        value: wafer.value,
        others: rest,
        other_wafers: new Set(series.dies.map((d) => d.wafer)).size - 1,
        u,
        z,
      },
      readings: mergeRefs(wafer.dies.flatMap((d) => d.refs)),
      dies: wafer.dies.map((d) => d.unit),
    },
    suspects: suspectsOfDies(facts, diesOfWafers(facts, new Set([wafer.wafer]))),
  }));
}

function isFarther(facts: LotFacts, { trait, polarisation }: Series, a: WaferMean, b: WaferMean): boolean {
  const known = isDefaultTrait(trait) ? defaultOf(facts.platform, trait, polarisation) : null;
  const from = known?.value ?? 0;
  return Math.abs(a.value - from) >= Math.abs(b.value - from);
}
