import {
  fisherExact,
  type Suspect,
  suspects,
  type TracedUnit,
} from "../../../models/decision/suspects/mod.ts";
import { dieOfGuide } from "../../../shared/ids.ts";
import type { LotFacts, LotSummary, StepFact, WaferFact } from "./facts.ts";
import { type FlagSuspect, plural, pText } from "./types.ts";

/** Separates the parts of an attribute's name; no id or step may hold it. */
const PART = "\u001f";
/** No more suspects than people read. */
const MOST = 6;

type Attributes = Record<string, string | null>;

/** Steps of a wafer as attributes; a step done twice keeps its last tool and recipe under one name, the earlier under another. */
function waferAttributes(wafer: WaferFact, steps: readonly StepFact[]): Attributes {
  const out: Attributes = { [`substrate_batch${PART}`]: wafer.substrate_batch };
  const times = new Map<string, number>();
  for (const s of steps.filter((step) => step.wafer === wafer.wafer)) {
    const n = (times.get(s.step) ?? 0) + 1;
    times.set(s.step, n);
    const name = n === 1 ? s.step : `${s.step} (${n})`;
    out[`step${PART}${name}${PART}tool`] = s.tool;
    out[`step${PART}${name}${PART}recipe`] = s.recipe;
  }
  return out;
}

/** Every die of a lot with its wafer's steps and batch and its own coatings. */
export function diesOf(facts: LotFacts): TracedUnit[] {
  const ofWafer = new Map(facts.wafers.map((w) => [w.wafer, waferAttributes(w, facts.steps)]));
  const coated = new Map(facts.coatings.map((c) => [`${c.die_id}|${c.facet}`, c.coating_run]));
  const facets = [...new Set(facts.coatings.map((c) => c.facet))];
  return [...facts.design.guidesOfDie].map(([die, guides]) => ({
    id: die,
    within: [guides[0]!.wafer, facts.lot],
    attributes: {
      ...ofWafer.get(guides[0]!.wafer) ?? {},
      // A bare die says nothing about a coating: it was never in the run.
      ...Object.fromEntries(facets.map((f) => [`coating_run${PART}${f}`, coated.get(`${die}|${f}`) ?? null])),
    },
  }));
}

/**
 * Suspects among what the affected dies of a lot went through, likeliest first.
 * @param leftOut dies that are neither: what is wrong with them may be something else
 */
export function suspectsOfDies(
  facts: LotFacts,
  affected: ReadonlySet<string>,
  leftOut: ReadonlySet<string> = new Set(),
): FlagSuspect[] {
  const dies = diesOf(facts).filter((d) => affected.has(d.id) || !leftOut.has(d.id));
  return suspectsAmong(dies, affected, ["wafer", "lot"], "dies");
}

/** Suspects among the groups of guides (and everything else) of a lot. */
export function suspectsOfGuides(facts: LotFacts, affected: ReadonlySet<string>): FlagSuspect[] {
  const dies = new Map(diesOf(facts).map((d) => [d.id, d]));
  const units = facts.design.guides.map((g): TracedUnit => {
    const die = dies.get(dieOfGuide(g.guide_id))!;
    return {
      id: g.guide_id,
      within: [die.id, ...die.within],
      attributes: { ...die.attributes, [`group${PART}`]: g.group },
    };
  });
  return suspectsAmong(units, affected, ["die", "wafer", "lot"], "guides");
}

/** Suspects among the steps and batches of a lot's wafers, against those of other lots. */
export function suspectsOfLot(lot: LotSummary, others: readonly LotSummary[]): FlagSuspect[] {
  const unit = (of: LotSummary) => (wafer: WaferFact): TracedUnit => ({
    id: wafer.wafer,
    within: [of.lot],
    attributes: waferAttributes(wafer, of.steps),
  });
  const units = [lot, ...others].flatMap((of) => of.wafers.map(unit(of)));
  return suspectsAmong(units, new Set(lot.wafers.map((w) => w.wafer)), ["lot"], "wafers");
}

function suspectsAmong(
  units: readonly TracedUnit[],
  affected: ReadonlySet<string>,
  groups: readonly string[],
  each: string,
): FlagSuspect[] {
  const bad = units.filter((u) => affected.has(u.id));
  const report = suspects(bad, units.filter((u) => !affected.has(u.id)));
  const parting = report.results.filter(parts);
  return report.results
    // What the design can't test at all says nothing.
    .filter((s) => s.pValue < 1 && s.affectedWith / s.affected > s.unaffectedWith / Math.max(1, s.unaffected))
    .map((s) => ({ s, fisher: overall(s) }))
    .sort((a, b) => a.s.corrected - b.s.corrected || a.fisher - b.fisher)
    .slice(0, MOST)
    .flatMap(({ s, fisher }) => named(s, fisher, groups, each, parting.length === 1 && parting[0] === s));
}

/** Carried by all that are affected and by nothing else. */
const parts = (s: Suspect): boolean =>
  s.affected > 0 && s.affectedWith === s.affected && s.unaffectedWith === 0 && s.unaffected > 0;

const overall = (s: Suspect): number =>
  fisherExact({
    affectedWith: s.affectedWith,
    affectedWithout: s.affected - s.affectedWith,
    unaffectedWith: s.unaffectedWith,
    unaffectedWithout: s.unaffected - s.unaffectedWith,
  }).over;

/** A hypothesis as entries of the output: tool and recipe of one step are one entry, other names have their own. */
function named(
  s: Suspect,
  fisher: number,
  groups: readonly string[],
  each: string,
  onlyDifference: boolean,
): FlagSuspect[] {
  const entries = new Map<string, Pick<FlagSuspect, "kind" | "step" | "tool" | "recipe" | "name">>();
  for (const { attribute, value } of s.names) {
    const [kind, a, b] = attribute.split(PART) as [FlagSuspect["kind"], string, string | undefined];
    if (kind === "step") {
      const held = entries.get(`step|${a}`) ?? { kind, step: a, tool: null, recipe: null, name: null };
      entries.set(`step|${a}`, { ...held, [b!]: value });
    } else {
      const name = kind === "coating_run" ? `${value}|${a}` : value;
      entries.set(`${kind}|${name}`, { kind, step: null, tool: null, recipe: null, name });
    }
  }
  const all = [...entries.values()];
  return all.map((entry) => ({
    ...entry,
    p_value: s.corrected,
    p_value_uncorrected: s.pValue,
    p_value_dies: fisher,
    affected_with: s.affectedWith,
    affected: s.affected,
    unaffected_with: s.unaffectedWith,
    unaffected: s.unaffected,
    compared: s.dealings.map((d) => {
      const what = d.by === "unit" ? each : `${groups[d.by]}s`;
      return `${d.carriers} of ${d.of} ${what}`;
    }).join(", ") || `no ${each} that could be compared`,
    verdict: s.verdict,
    only_difference: onlyDifference && all.length === 1,
    same_as: all.filter((other) => other !== entry).map(suspectName),
  }));
}

/** `diffusion on furnace-3 with D7`, `coating run C203 (out)`. */
export function suspectName(s: Pick<FlagSuspect, "kind" | "step" | "tool" | "recipe" | "name">): string {
  switch (s.kind) {
    case "step":
      return [
        s.step,
        s.tool === null ? "" : `on ${s.tool}`,
        s.recipe === null ? "" : `with recipe ${s.recipe}`,
      ].filter((t) => t !== "").join(" ");
    case "coating_run":
      return `coating run ${s.name!.replace(/\|(\w+)$/, " ($1)")}`;
    case "substrate_batch":
      return `substrate batch ${s.name}`;
    case "group":
      return `group ${s.name}`;
  }
}

/** What the comparison says of a suspect, as a sentence. */
export function suspectSentence(s: FlagSuspect): string {
  const rest = s.unaffected === 0 ? "" : `, ${s.unaffected_with} of ${plural(s.unaffected, "other")}`;
  const weight = {
    suspect: `over-represented (${pText(s.p_value)}, corrected)`,
    measured: `measured: ${s.compared} (${pText(s.p_value)})`,
    no_power: `with ${s.compared} to compare, chance can't be excluded (${
      pText(s.p_value_uncorrected)
    } at best)`,
    not_shown: `not shown to be more than chance (${pText(s.p_value)}, corrected)`,
  }[s.verdict];
  const only = s.only_difference ? "; nothing else on record tells them apart" : "";
  const same = s.same_as.length === 0 ? "" : `; can't be told apart from ${s.same_as.join(", ")}`;
  return `${suspectName(s)}: ${s.affected_with} of ${s.affected} affected${rest}${only}; ${weight}${same}`;
}
