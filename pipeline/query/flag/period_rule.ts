import { compareIds } from "../../../shared/ids.ts";
import type { LotFacts } from "./facts.ts";
import type { FoundPeriod } from "./period.ts";
import type { RuleOf } from "./rules.ts";
import { suspectsOfDies } from "./suspects_of.ts";
import { diesOfWafers } from "./trait_rules.ts";
import { type Flag, mergeRefs, num, percent, plural } from "./types.ts";

/** Periods found that are not the ones drawn, one flag per wafer. */
export function periodOff(facts: LotFacts, rule: RuleOf<"period_off">): Flag[] {
  const off = facts.periods.filter(({ ratio, u_ratio }) => {
    const difference = Math.abs(ratio - 1);
    return difference > rule.tolerance && difference > rule.k * u_ratio;
  });
  const wafers = new Set(off.map((p) => p.wafer));
  return [...Map.groupBy(off, (p) => p.wafer)].map(([wafer, all]) => {
    // A whole wafer is told where no drawn period of it stands out by itself.
    const single = all.filter((p) => p.drawn_um !== null);
    const told = (single.length > 0 ? single : all).sort((a, b) =>
      Math.abs(b.ratio - 1) / b.u_ratio - Math.abs(a.ratio - 1) / a.u_ratio
    );
    const first = told[0]!;
    const units = [...new Set(told.flatMap((p) => p.units))].sort(compareIds);
    const inspected = new Set(facts.periods.filter((p) => p.wafer === wafer).flatMap((p) => p.units));
    return {
      scope: "wafer",
      id: wafer,
      lot: facts.lot,
      rule: rule.rule,
      severity: rule.severity,
      brief: `period of ${plural(units.length, "guide")} not as drawn (${signed(first.ratio - 1)})`,
      statement: `Wafer ${wafer}: the period of ${units.length} of ${
        plural(inspected.size, "inspected guide")
      } is not the one drawn; ${sentenceOf(first)}${
        told.length === 1 ? "" : `; also ${told.slice(1, 4).map(briefly).join(", ")}`
      }${told.length > 4 ? ` and ${told.length - 4} more` : ""}`,
      evidence: {
        numbers: {
          drawn_um: first.drawn_um,
          found_um: first.drawn_um === null ? null : first.ratio * first.drawn_um,
          u_um: first.drawn_um === null ? null : first.u_ratio * first.drawn_um,
          relative: first.ratio - 1,
          u_relative: first.u_ratio,
          from: first.from,
          guides_off: units.length,
        },
        readings: mergeRefs(told.flatMap((p) => p.readings)),
        guides: units,
      },
      suspects: suspectsOfDies(facts, diesOfWafers(facts, wafers)),
    };
  });
}

const signed = (x: number): string => `${x > 0 ? "+" : "−"}${percent(Math.abs(x))}`;

const sourceOf = (p: FoundPeriod): string =>
  p.from === "walls"
    ? `from ${p.count} walls`
    : `from ${plural(p.count, "window")} on ${plural(p.units.length, "guide")}`;

function sentenceOf(p: FoundPeriod): string {
  if (p.drawn_um === null) {
    return `all of its periods together are ${signed(p.ratio - 1)} off (u ${percent(p.u_ratio)}, ${
      sourceOf(p)
    })`;
  }
  const who = p.units.length === 1 ? `${p.units[0]} has` : `they have`;
  return `${who} ${num(p.ratio * p.drawn_um, 5)} µm (u ${num(p.u_ratio * p.drawn_um, 2)}, ${
    sourceOf(p)
  }), drawn ${num(p.drawn_um, 5)} µm`;
}

const briefly = (p: FoundPeriod): string =>
  `${p.units.length === 1 ? p.units[0] : plural(p.units.length, "guide")} drawn ${
    num(p.drawn_um ?? 1, 5)
  } µm with ${num(p.ratio * (p.drawn_um ?? 1), 5)} µm`;
