import { defaultOf } from "../../traits/platform_defaults.ts";
import type { TraitRow } from "../../traits/trait_row.ts";
import type { LotFacts } from "./facts.ts";
import type { RuleOf } from "./rules.ts";
import { seriesWords, unitOf } from "./series.ts";
import { type Flag, mergeRefs, num, plural } from "./types.ts";

/** Readings of the same thing that differ by more than k·u. */
export function repeatedReadings(facts: LotFacts, rule: RuleOf<"repeated_readings">): Flag[] {
  const groups = new Map<string, TraitRow[]>();
  for (const row of facts.traits) {
    if (!(rule.traits as string[]).includes(row.trait) || row.wafer === null) continue;
    const key = [row.trait, row.unit, row.wavelength_nm, row.polarisation, row.process].join("|");
    const held = groups.get(key);
    if (held === undefined) groups.set(key, [row]);
    else held.push(row);
  }
  const flags: Flag[] = [];
  for (const rows of groups.values()) {
    let worst: { a: TraitRow; b: TraitRow; z: number } | null = null;
    for (const [k, a] of rows.entries()) {
      for (const b of rows.slice(k + 1)) {
        const z = Math.abs(a.value - b.value) / Math.hypot(a.u, b.u);
        if (z > rule.k && z > (worst?.z ?? 0)) worst = { a, b, z };
      }
    }
    if (worst === null) continue;
    const { a, b, z } = worst;
    const unit = unitOf(a.trait);
    const shown = (r: TraitRow) => `${num(r.value)} ± ${num(r.u, 2)}${unit} (${r.method})`;
    flags.push({
      scope: "wafer",
      id: a.wafer!,
      lot: facts.lot,
      rule: rule.rule,
      severity: rule.severity,
      brief: `${a.unit}: readings of its ${seriesWords(a)} disagree`,
      statement: `${a.unit}: two readings of its ${seriesWords(a)} disagree, ${shown(a)} and ${shown(b)}: ${
        num(z, 2)
      } times their joint u`,
      evidence: {
        numbers: { trait: a.trait, first: a.value, second: b.value, z },
        readings: mergeRefs([...a.readings, ...b.readings]),
        ...(a.guide_id === null ? {} : { guides: [a.guide_id] }),
      },
      suspects: [],
    });
  }
  return flags;
}

/** Scans of a lot that all lie on one side of the calculation: a finding about the platform file. */
export function scanResidual(facts: LotFacts, rule: RuleOf<"scan_residual">): Flag[] {
  const byProcess = new Map<string, TraitRow[]>();
  for (const row of facts.traits) {
    if (row.trait !== "mismatch_offset_per_m") continue;
    byProcess.set(row.process ?? "", [...byProcess.get(row.process ?? "") ?? [], row]);
  }
  const stated = defaultOf(facts.platform, "mismatch_offset_per_m", null);
  return [...byProcess].flatMap(([process, rows]): Flag[] => {
    if (rows.length < rule.least_scans) return [];
    const values = rows.map((r) => r.value);
    const centre = values.reduce((a, b) => a + b, 0) / values.length;
    const s = Math.sqrt(values.reduce((sum, v) => sum + (v - centre) ** 2, 0) / (values.length - 1));
    const se = Math.max(s / Math.sqrt(values.length), Math.hypot(...rows.map((r) => r.u)) / values.length);
    if (!(Math.abs(centre) > rule.k * se)) return [];
    const beyond = stated === null || Math.abs(centre - stated.value) > rule.k * stated.u;
    return [{
      scope: "lot",
      id: facts.lot,
      lot: facts.lot,
      rule: rule.rule,
      severity: beyond ? rule.severity_beyond_platform : rule.severity,
      brief: `scans lie ${num(centre)} 1/m off the calculation`,
      statement:
        `Platform ${facts.platform.platform}: ${
          plural(rows.length, "scan")
        } of lot ${facts.lot} (${process}) ` +
        `${centre > 0 ? "lie above" : "lie below"} the calculated mismatch by ${
          num(Math.abs(centre))
        } 1/m (standard error ${num(se, 2)}); ` +
        (stated === null
          ? "the platform file states no uncertainty of its calculation (mismatch_offset_per_m)"
          : beyond
          ? `the platform file states only u = ${num(stated.u)} 1/m`
          : `within the u = ${num(stated.u)} 1/m that the platform file states, and used as an offset`),
      evidence: {
        numbers: {
          mean_per_m: centre,
          standard_error_per_m: se,
          scans: rows.length,
          stated_u_per_m: stated?.u ?? null,
        },
        readings: mergeRefs(rows.flatMap((r) => r.readings)),
        guides: rows.map((r) => r.unit),
      },
      suspects: [],
    }];
  });
}
