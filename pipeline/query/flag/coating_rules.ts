import { coatedReflectivity, isRefused } from "../../../models/metrology/mod.ts";
import { normalTwoSided } from "../../../models/decision/tails.ts";
import { nm, toNm } from "../../../shared/units.ts";
import type { Polarisation } from "../../../shared/vocabulary.ts";
import type { CheckedRequest } from "../../../shared/schemas/request.ts";
import { defaultOf } from "../../traits/platform_defaults.ts";
import { type ReadingRef, refsOf, type TraitRow } from "../../traits/trait_row.ts";
import type { LotFacts } from "./facts.ts";

import type { RuleOf } from "./rules.ts";
import { suspectsOfDies } from "./suspects_of.ts";
import { type Flag, type FlagSuspect, mergeRefs, num, percent, plural } from "./types.ts";
import { dieVerdicts, inPlay } from "./verdicts.ts";

/** Waves that pass a facet: they enter at `in` and leave at `out`. */
export function wavesAt(
  facet: "in" | "out",
  { request, waves }: CheckedRequest,
): { lambda: number; pol: Polarisation }[] {
  const p = { lambda: waves.lambdaP, pol: waves.polP };
  const s = { lambda: waves.lambdaS, pol: waves.polS };
  const i = { lambda: waves.lambdaI, pol: waves.polI };
  switch (request.process) {
    case "pair-generation":
      return facet === "in" ? [p] : [s, i];
    case "second-harmonic":
      return facet === "in" ? [s] : [p];
    case "sum-frequency":
      return facet === "in" ? [s, i] : [p];
    case "difference-frequency":
      return facet === "in" ? [p, s] : [i];
  }
}

interface CoatingHit {
  readonly request: string;
  readonly lambda_nm: number;
  readonly reflectivity: number;
  readonly u: number;
  readonly limit: number;
  readonly known: number;
  readonly z: number;
  readonly refs: readonly ReadingRef[];
}

/** Coating runs whose witness turns back more than the platform's coatings do, where a request has a wave. */
export function coatingOffTarget(facts: LotFacts, rule: RuleOf<"coating_off_target">): Flag[] {
  return coatingRuns(facts).flatMap(({ run, facet, dies, spectrum, entries }): Flag[] => {
    const hits: CoatingHit[] = [];
    const readings = spectrum.map((r) => ({ lambda: nm(r.wavelength_nm!), reflectivity: r.value, u: r.u }));
    for (const { checked } of inPlay(facts)) {
      for (const { lambda, pol } of wavesAt(facet, checked)) {
        const found = coatedReflectivity(readings, lambda);
        const known = defaultOf(facts.platform, "coated_reflectivity", pol);
        if (isRefused(found) || known === null) continue;
        const limit = known.value + rule.k * Math.hypot(known.u, found.u);
        if (!(found.value > limit)) continue;
        hits.push({
          request: checked.request.request,
          lambda_nm: toNm(lambda),
          reflectivity: found.value,
          u: found.u,
          limit,
          known: known.value,
          z: (found.value - known.value) / Math.hypot(known.u, found.u),
          refs: found.used.flatMap((k) => spectrum[k]!.readings),
        });
      }
    }
    if (hits.length === 0) return [];
    const worst = hits.reduce((a, b) => b.reflectivity > a.reflectivity ? b : a);
    // Powers are counted behind the input facet: no figure knows what that one turns back.
    const lost = facet === "in" ? [] : rejectedDies(facts, hits.map((h) => h.request), new Set(dies));
    return [{
      scope: "coating_run",
      id: run,
      lot: facts.lot,
      rule: rule.rule,
      severity: worst.reflectivity >= rule.act_above ? "act" : rule.severity,
      brief: `${facet} facet turns back ${percent(worst.reflectivity)} at ${num(worst.lambda_nm, 5)} nm`,
      statement:
        `Coating run ${run}, ${facet} facet: it turns back ${percent(worst.reflectivity)} at ${
          num(worst.lambda_nm, 5)
        } nm for ${[...new Set(hits.map((h) => h.request))].join(", ")} (u ${
          percent(worst.u)
        }); the platform's coatings turn back ${percent(worst.known)}, the limit is ${
          percent(worst.limit)
        }. It is on ${plural(dies.length, "die")}` +
        (lost.length === 0 ? "" : `, of which ${lost.length} are rejected`),
      evidence: {
        numbers: {
          facet,
          wavelength_nm: worst.lambda_nm,
          reflectivity: worst.reflectivity,
          u: worst.u,
          limit: worst.limit,
          request: worst.request,
        },
        readings: mergeRefs([...hits.flatMap((h) => h.refs), ...entries]),
        dies,
      },
      suspects: blame(facts, run, facet, dies, lost, worst.z),
    }];
  });
}

/**
 * The run itself comes first: its own witness shows it, and p is the chance that a coating of the platform reads as high. What the
 * failing dies have in common besides follows.
 */
function blame(
  facts: LotFacts,
  run: string,
  facet: string,
  dies: readonly string[],
  lost: readonly string[],
  z: number,
): FlagSuspect[] {
  const name = `${run}|${facet}`;
  const tested = lost.length === 0 ? [] : suspectsOfDies(facts, new Set(lost));
  const ready = [...facts.design.guidesOfDie.keys()].length;
  const p = normalTwoSided(z) / 2;
  return [{
    kind: "coating_run",
    step: null,
    tool: null,
    recipe: null,
    name,
    p_value: p,
    p_value_uncorrected: p,
    p_value_dies: tested.find((s) => s.name === name)?.p_value_dies ?? 1,
    affected_with: lost.length > 0 ? lost.length : dies.length,
    affected: lost.length > 0 ? lost.length : dies.length,
    unaffected_with: lost.length > 0 ? dies.length - lost.length : 0,
    unaffected: ready - (lost.length > 0 ? lost.length : dies.length),
    compared: "its witness reading with the platform's coatings",
    verdict: "measured",
    only_difference: false,
    same_as: [],
  }, ...tested.filter((s) => s.name !== name && (s.verdict === "suspect" || s.only_difference))];
}

/** Dies with a coating that are rejected for some of the requests and limited by a figure that the facet enters. */
function rejectedDies(facts: LotFacts, requests: readonly string[], on: ReadonlySet<string>): string[] {
  const figures = /^(heralding|facet|car)/;
  return [
    ...new Set(
      inPlay(facts).filter((p) => requests.includes(p.checked.request.request)).flatMap((p) =>
        dieVerdicts(p.decisions).filter((d) =>
          d.decision === "reject" && d.unavailable === null && on.has(d.die) &&
          figures.test(d.best.limited_by ?? "")
        ).map((d) => d.die)
      ),
    ),
  ];
}

interface CoatingRun {
  readonly run: string;
  readonly facet: "in" | "out";
  readonly dies: string[];
  readonly spectrum: readonly TraitRow[];
  readonly entries: readonly ReadingRef[];
}

/** Coating runs per facet, with the dies that they count for. */
export function coatingRuns(facts: LotFacts): CoatingRun[] {
  const runs = new Map<
    string,
    { run: string; facet: "in" | "out"; dies: string[]; rows: LotFacts["coatings"][number][] }
  >();
  for (const c of facts.coatings) {
    const key = `${c.coating_run}|${c.facet}`;
    const held = runs.get(key) ?? { run: c.coating_run, facet: c.facet, dies: [], rows: [] };
    held.dies.push(c.die_id);
    held.rows.push(c);
    runs.set(key, held);
  }
  return [...runs].map(([key, { run, facet, dies, rows }]) => ({
    run,
    facet,
    dies,
    spectrum: facts.traits.filter((t) => t.trait === "reflectivity" && t.unit === key),
    entries: refsOf("coatings", rows),
  }));
}

/** Coating runs that nobody measured, or not where a request has a wave. */
export function coatingUnknown(facts: LotFacts, rule: RuleOf<"coating_unknown">): Flag[] {
  return coatingRuns(facts).flatMap(({ run, facet, dies, spectrum, entries }): Flag[] => {
    const readings = spectrum.map((r) => ({ lambda: nm(r.wavelength_nm!), reflectivity: r.value, u: r.u }));
    const missing = new Set<string>();
    for (const { checked } of inPlay(facts)) {
      for (const { lambda } of wavesAt(facet, checked)) {
        if (isRefused(coatedReflectivity(readings, lambda))) missing.add(`${num(toNm(lambda), 5)} nm`);
      }
    }
    if (missing.size === 0) return [];
    return [{
      scope: "coating_run",
      id: run,
      lot: facts.lot,
      rule: rule.rule,
      severity: rule.severity,
      brief: spectrum.length === 0
        ? `${facet} facet never measured`
        : `${facet} facet not measured at ${[...missing].join(", ")}`,
      statement: `Coating run ${run}, ${facet} facet: ${
        spectrum.length === 0
          ? "nobody measured its spectrum"
          : `its spectrum does not reach ${[...missing].join(", ")}`
      }; the platform's default stands in on ${plural(dies.length, "die")}`,
      evidence: { numbers: { facet, readings: spectrum.length }, readings: mergeRefs(entries), dies },
      suspects: [],
    }];
  });
}
