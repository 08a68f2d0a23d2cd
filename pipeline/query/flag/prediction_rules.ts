import { mostlyUnmatched, NO_MATCH } from "../limits.ts";
import { exactInterval } from "../../../models/decision/yields.ts";
import { mean } from "../../../shared/statistics.ts";
import type { LotFacts } from "./facts.ts";
import type { RuleOf } from "./rules.ts";
import { unitOf } from "./series.ts";
import { suspectsOfDies, suspectsOfGuides } from "./suspects_of.ts";
import { type Flag, num, percent, plural } from "./types.ts";
import { byWafer, type DieVerdict, dieVerdicts, inPlay, twoSided } from "./verdicts.ts";

/** Yield of dies that can be shipped, per wafer, below the floor. */
export function yieldFloor(facts: LotFacts, rule: RuleOf<"yield_floor">): Flag[] {
  interface Low {
    readonly request: string;
    readonly dies: readonly DieVerdict[];
    readonly good: number;
    readonly bound: number;
    readonly limit: string | null;
  }
  const low = new Map<string, Low[]>();
  for (const { checked, decisions } of inPlay(facts)) {
    const { request } = checked.request;
    if (rule.request !== undefined && rule.request !== request) continue;
    for (const [wafer, dies] of byWafer(dieVerdicts(decisions).filter((d) => d.unavailable === null))) {
      const good = dies.filter((d) => d.decision === "accept").length;
      if (good / dies.length >= rule.floor) continue;
      const bound = exactInterval(good, dies.length, twoSided(rule.confidence)).high;
      const limit = mostOften(
        dies.filter((d) => d.decision !== "accept").map(({ best }) =>
          mostlyUnmatched(best.probability, Number(best.matched)) ? NO_MATCH : best.limited_by
        ),
      );
      low.set(wafer, [...low.get(wafer) ?? [], { request, dies, good, bound, limit }]);
    }
  }
  return [...low].flatMap(([wafer, all]) =>
    [true, false].flatMap((certain): Flag[] => {
      const own = all.filter((l) => (l.bound < rule.floor) === certain);
      if (own.length === 0) return [];
      const parts = own.map((l) =>
        `${l.good} of ${plural(l.dies.length, "die")} accepted for ${l.request} (at most ${
          percent(l.bound)
        } with ${percent(rule.confidence)} confidence${
          l.limit === null ? "" : `; the rest limited by ${l.limit}`
        })`
      );
      const failed = new Set(
        own.flatMap((l) => l.dies.filter((d) => d.decision === "reject").map((d) => d.die)),
      );
      const first = own[0]!;
      return [{
        scope: "wafer",
        id: wafer,
        lot: facts.lot,
        rule: rule.rule,
        severity: certain ? rule.severity : rule.severity_when_not_certain,
        brief: own.map((l) => `${l.good} of ${plural(l.dies.length, "die")} accepted for ${l.request}`).join(
          ", ",
        ),
        statement: `Wafer ${wafer}: ${parts.join("; ")}; the floor is ${percent(rule.floor)}` +
          (certain ? "" : ", which the interval does not exclude"),
        evidence: {
          numbers: {
            request: own.map((l) => l.request).join(", "),
            accepted: first.good,
            dies: first.dies.length,
            upper_bound: first.bound,
            floor: rule.floor,
            limited_by: first.limit,
          },
          readings: [],
          dies: [...failed],
        },
        // Dies rejected on other wafers may have failed for another reason, cut ones were never tried.
        suspects: suspectsOfDies(facts, failed, notGood(facts, own.map((l) => l.request))),
      }];
    })
  );
}

/** Dies that are rejected for one of some requests, or can't be shipped. */
function notGood(facts: LotFacts, requests: readonly string[]): Set<string> {
  return new Set(
    inPlay(facts).filter((p) => requests.includes(p.checked.request.request)).flatMap((p) =>
      dieVerdicts(p.decisions).filter((d) => d.decision === "reject" || d.unavailable !== null).map((d) =>
        d.die
      )
    ),
  );
}

function mostOften(names: readonly (string | null)[]): string | null {
  const counts = new Map<string, number>();
  for (const name of names) if (name !== null) counts.set(name, (counts.get(name) ?? 0) + 1);
  return [...counts].sort((a, b) => b[1] - a[1] || (a[0] < b[0] ? -1 : 1))[0]?.[0] ?? null;
}

/** A figure beyond its limit on too many dies of a wafer. */
export function figureLimit(facts: LotFacts, rule: RuleOf<"figure_limit">): Flag[] {
  const [atLeast, atMost] = [rule.at_least ?? -Infinity, rule.at_most ?? Infinity];
  return inPlay(facts).filter((p) => rule.request === undefined || rule.request === p.checked.request.request)
    .flatMap(({ checked, decisions, figures }) =>
      [...byWafer(dieVerdicts(decisions).filter((d) => d.unavailable === null))].flatMap(
        ([wafer, dies]): Flag[] => {
          const values = dies.map((d) => figures.get(d.best.guide_id)?.get(rule.figure)?.mean ?? null);
          const known = values.filter((v) => v !== null);
          const beyond = known.filter((v) => v < atLeast || v > atMost).length;
          if (known.length === 0) return [];
          const bound = exactInterval(beyond, known.length, twoSided(rule.confidence)).low;
          if (!(bound > rule.share_beyond)) return [];
          const { request } = checked.request;
          const limit = [
            rule.at_least === undefined ? "" : `at least ${num(rule.at_least)}`,
            rule.at_most === undefined ? "" : `at most ${num(rule.at_most)}`,
          ].filter((t) => t !== "").join(" and ");
          const failing = dies.filter((_, k) =>
            values[k] !== null && (values[k]! < atLeast || values[k]! > atMost)
          );
          return [{
            scope: "wafer",
            id: wafer,
            lot: facts.lot,
            rule: rule.rule,
            severity: rule.severity,
            brief: `${rule.figure} beyond its limit on ${beyond} of ${
              plural(known.length, "die")
            } (${request})`,
            statement: `Wafer ${wafer}: ${rule.figure} of ${beyond} of ${
              plural(known.length, "die")
            } is beyond ${limit}${unitOf(rule.figure)} for ${request} (mean ${num(mean(known))}; at least ${
              percent(bound)
            } of dies with ${percent(rule.confidence)} confidence, ${percent(rule.share_beyond)} may be)`,
            evidence: {
              numbers: { request, figure: rule.figure, beyond, dies: known.length, lower_bound: bound },
              readings: [],
              dies: failing.map((d) => d.die),
            },
            suspects: suspectsOfDies(facts, new Set(failing.map((d) => d.die))),
          }];
        },
      )
    );
}

/** Groups of guides of which not one matches for any request that was predicted. */
export function noOperatingPoint(facts: LotFacts, rule: RuleOf<"no_operating_point">): Flag[] {
  if (facts.predictions.length === 0) return [];
  const matched = new Set(
    facts.predictions.flatMap((p) => p.decisions.filter((d) => d.matched).map((d) => d.guide_id)),
  );
  if (matched.size === 0 && !facts.requestsNamed) return [];
  const groups = new Map<string, string[]>();
  const nameOf = (g: { group: string | null; period_um: number }) => g.group ?? `period ${g.period_um} µm`;
  for (const g of facts.design.guides) groups.set(nameOf(g), [...groups.get(nameOf(g)) ?? [], g.guide_id]);
  const lost = [...groups].filter(([, ids]) =>
    ids.length >= rule.least_guides && ids.every((id) => !matched.has(id))
  );
  const periods = (ids: readonly string[]) => ids.map((id) => facts.design.guideById.get(id)!.period_um);
  const good = periods([...matched]);
  return lost.map(([group, ids]) => {
    const own = periods(ids);
    const requests = facts.predictions.map((p) => p.checked.request.request);
    const range = (values: readonly number[]) => {
      const [a, b] = [Math.min(...values), Math.max(...values)];
      return a === b ? `${num(a, 5)} µm` : `${num(a, 5)} to ${num(b, 5)} µm`;
    };
    return {
      scope: "lot",
      id: facts.lot,
      lot: facts.lot,
      rule: rule.rule,
      severity: rule.severity,
      brief: `group ${group} (${plural(ids.length, "guide")}, period ${range(own)}) matches nothing`,
      statement:
        `Lot ${facts.lot}: none of the ${ids.length} guides of group ${group} matches at any temperature of any of ` +
        `${plural(requests.length, "request")} predicted; their period is ${range(own)}` +
        (good.length === 0 ? "" : `, guides that match have ${range(good)}`) +
        `: a wrong period in the mask, or a request that was not predicted`,
      evidence: {
        numbers: { group, guides: ids.length, period_um: own[0]!, requests: requests.join(", ") },
        readings: [maskRef(facts, ids)],
        guides: ids,
      },
      suspects: suspectsOfGuides(facts, new Set(lost.flatMap(([, all]) => all))),
    };
  });
}

function maskRef(facts: LotFacts, ids: readonly string[]) {
  const rows = ids.map((id) => facts.design.guideById.get(id)!);
  const { file_name, source_file } = rows[0]!;
  const lines = rows.map((r) => r.source_line).sort((a, b) => a - b);
  return { table: "guides", file_name, source_file, lines: lines.map((l) => [l, l] as const) };
}

/** What a delivered die did, against what was predicted. */
export function outcomeResidual(facts: LotFacts, rule: RuleOf<"outcome_residual">): Flag[] {
  return facts.outcomes.flatMap((o): Flag[] => {
    const predicted = facts.predictions.find((p) => p.checked.request.request === o.request)?.figures
      .get(o.guide_id ?? "")?.get(o.figure);
    if (predicted === undefined || predicted.mean === null) return [];
    const u = Math.hypot(predicted.u ?? 0, o.u_value ?? 0);
    const z = Math.abs(o.value - predicted.mean) / u;
    if (!(z > rule.k)) return [];
    const unit = unitOf(o.figure);
    return [{
      scope: "wafer",
      id: facts.design.guideById.get(o.guide_id!)!.wafer,
      lot: facts.lot,
      rule: rule.rule,
      severity: rule.severity,
      brief: `${o.figure} of ${o.unit} found ${num(o.value)}${unit}, predicted ${num(predicted.mean)}`,
      statement: `${o.unit}: the experiment found ${o.figure} = ${num(o.value)}${unit}${
        o.u_value === null ? " (no u stated)" : ` ± ${num(o.u_value, 2)}`
      } for ${o.request}, predicted was ${num(predicted.mean)} ± ${num(predicted.u ?? 0, 2)}: ${
        num(z, 2)
      } times their joint u`,
      evidence: {
        numbers: {
          request: o.request,
          figure: o.figure,
          outcome: o.value,
          predicted: predicted.mean,
          u_predicted: predicted.u,
          u_outcome: o.u_value,
          z,
        },
        readings: [{
          table: "outcomes",
          file_name: o.file_name,
          source_file: o.source_file,
          lines: [[o.source_line, o.source_line]],
        }],
        guides: [o.guide_id!],
      },
      suspects: [],
    }];
  });
}

/** Dies on hold, and what their limiting figure rests on. */
export function coverageThin(facts: LotFacts, rule: RuleOf<"coverage_thin">): Flag[] {
  return inPlay(facts).flatMap(({ checked, decisions, figures }): Flag[] => {
    const { request } = checked.request;
    const held = dieVerdicts(decisions).filter((d) => d.decision === "hold" && d.unavailable === null);
    const inferred = held.map((d) => ({
      d,
      basis: figures.get(d.best.guide_id)?.get(d.best.limited_by ?? "")?.basis,
    })).filter((h) => h.basis !== undefined && h.basis !== "measured");
    if (inferred.length < rule.least_dies) return [];
    const counts = new Map<string, number>();
    for (const { d, basis } of inferred) {
      const key = `${d.best.limited_by} on its ${
        basis === "platform" ? "platform's default" : `${basis}'s readings`
      }`;
      counts.set(key, (counts.get(key) ?? 0) + 1);
    }
    const list = [...counts].map(([what, n]) => `${what} (${n})`).join(", ");
    const all = dieVerdicts(decisions).filter((d) => d.unavailable === null).length;
    return [{
      scope: "lot",
      id: facts.lot,
      lot: facts.lot,
      rule: rule.rule,
      severity: rule.severity,
      brief: `${inferred.length} of ${plural(all, "die")} can't be decided for ${request}`,
      statement:
        `Lot ${facts.lot}: ${inferred.length} of ${
          plural(all, "die")
        } can't be decided for ${request}; what limits them is not ` +
        `measured on them but rests on other readings: ${list}`,
      evidence: {
        numbers: { request, dies_on_hold: inferred.length, dies: all },
        readings: [],
        dies: inferred.map((h) => h.d.die),
        guides: inferred.map((h) => h.d.best.guide_id),
      },
      suspects: [],
    }];
  });
}
