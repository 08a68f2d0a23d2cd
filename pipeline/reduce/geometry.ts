import { mean, standardDeviation, weightedMean } from "../../shared/statistics.ts";
import type { GeometryRecord } from "../records.ts";
import { refsOf } from "../traits/trait_row.ts";
import { grouped, type LotReadings, placeOf, type Reduced, uncertaintyOf } from "./lot_readings.ts";

/**
 * Geometry readings: per unit and quantity the mean over the guide. A width becomes its error against the mask, so that
 * guides of all designs can be pooled.
 */
export function reduceGeometry(readings: LotReadings): Reduced {
  const out: Reduced = { traits: [], remarks: [] };
  for (const rows of grouped(readings.geometry, (r) => `${r.unit}|${r.quantity}`)) {
    const first = rows[0]!;
    const drawn = first.quantity === "width_um" ? drawnWidth(readings, first) : 0;
    if (drawn === null) {
      out.remarks.push({
        code: "geometry_refused",
        unit: first.unit,
        statement: `${first.unit}: a width was read without naming a guide, and its guides differ in width`,
      });
      continue;
    }
    const { value, u, from } = alongGuide(readings, rows);
    out.traits.push({
      ...placeOf(first, readings.design),
      trait: first.quantity === "width_um" ? "width_error_um" : first.quantity,
      wavelength_nm: null,
      polarisation: null,
      process: null,
      value: value - drawn,
      u,
      u_from: from,
      method: rows.length === 1 ? "geometry reading" : `mean of ${rows.length} geometry readings`,
      readings: refsOf("geometry", rows),
      detail: first.quantity === "width_um" ? `read ${value.toFixed(3)} µm, drawn ${drawn} µm` : null,
    });
  }
  return out;
}

/** Readings of a whole guide are repeats; readings along it also say how much the guide varies. */
function alongGuide({ platform }: LotReadings, rows: readonly GeometryRecord[]) {
  const values = rows.map((r) => {
    const { u, from } = uncertaintyOf(r.u_value, platform.defaults.u_value?.[r.quantity]);
    return { value: r.value, u, from };
  });
  const from = values.every((v) => v.from === "stated") ? "stated" as const : "platform" as const;
  const along = rows.filter((r) => r.z_mm !== null);
  if (along.length < 2) return { ...weightedMean(values), from };
  const all = values.map((v) => v.value);
  const reading = Math.sqrt(mean(values.map((v) => v.u ** 2)));
  return { value: mean(all), u: Math.max(reading, standardDeviation(all)) / Math.sqrt(all.length), from };
}

/** Width on the mask of the guides that a reading may belong to; null where they differ. */
function drawnWidth({ design }: LotReadings, reading: GeometryRecord): number | null {
  if (reading.guide_id !== null) return design.guideById.get(reading.guide_id)!.width_um;
  const guides = reading.die_id === null
    ? design.guides.filter((g) => g.wafer === reading.wafer)
    : design.guidesOfDie.get(reading.die_id) ?? [];
  const widths = new Set(guides.map((g) => g.width_um));
  return widths.size === 1 ? [...widths][0]! : null;
}
