import { csvText } from "../console/mod.ts";
import type { DesignSensitivity } from "../designs/mod.ts";

/** One line per error of a design; a design without numbers has its reason. */
export function csvDesigns(designs: readonly DesignSensitivity[]): string {
  const titles = [
    "width_um",
    "period_um",
    "operating_temperature_c",
    "matched",
    "parameter",
    "by",
    "mismatch_per_m",
    "centre_nm",
    "temperature_c",
    "efficiency_percent",
    "purity",
    "reason",
  ];
  const rows = designs.flatMap((d) => {
    const common = [d.width_um, d.period_um, d.temperature_c, d.matched];
    if (d.reason !== null) return [[...common, ...new Array(7).fill(null), d.reason]];
    return d.rows.map((r) => [
      ...common,
      r.parameter,
      r.by,
      r.mismatch_per_m,
      r.centre_nm,
      r.temperature_c,
      r.efficiency_percent,
      r.purity,
      null,
    ]);
  });
  return csvText(titles, rows);
}
