import {
  bareReflectivity,
  coatedReflectivity,
  type CutbackFit,
  type CutbackPoint,
  fitCommonSlope,
  fitCutback,
  fringeLoss,
  isRefused,
  meanReflectivity,
  OUTLIER_LEVEL,
} from "../../models/metrology/mod.ts";
import { mm, nm, toDbPerCm } from "../../shared/units.ts";
import type { Uncertain } from "../../shared/vocabulary.ts";
import type { CutbackRecord, FacetsRecord, FringesRecord, GuideRecord } from "../records.ts";
import { refsOf, type TraitRow } from "../traits/trait_row.ts";
import {
  geometryOf,
  grouped,
  type LotReadings,
  placeOf,
  type Reduced,
  uncertaintyOf,
} from "./lot_readings.ts";

/** p of a cut-back's χ² below which its scatter is wider than the readings claim, and u is widened to cover it. */
const POOR_FIT = 0.01;

/** Cut-backs: one line per guide, wavelength and polarisation; with fewer than two lengths a common slope per die. */
export function reduceCutback(readings: LotReadings): Reduced {
  const out: Reduced = { traits: [], remarks: [] };
  const all = grouped(readings.cutback, (r) => `${r.unit}|${r.wavelength_nm}|${r.polarisation}`);
  const lines = all.filter((line) => lengthsOf(line) >= 2);
  const dies = grouped(
    all.filter((line) => lengthsOf(line) < 2),
    (line) => `${line[0]!.die_id ?? line[0]!.wafer}|${line[0]!.wavelength_nm}|${line[0]!.polarisation}`,
  );
  // One good lot in twenty has a reading named, not every twentieth line of it.
  const level = OUTLIER_LEVEL / (lines.length + dies.length);
  for (const line of lines) fitOne(readings, line, level, out);
  for (const die of dies) fitDie(readings, die, level, out);
  return out;
}

const lengthsOf = (rows: readonly CutbackRecord[]): number => new Set(rows.map((r) => r.length_mm)).size;

function pointsOf({ platform }: LotReadings, rows: readonly CutbackRecord[]): CutbackPoint[] {
  return rows.map((r) => ({
    length: mm(r.length_mm),
    lossDb: r.insertion_loss_db,
    u: uncertaintyOf(r.u_insertion_loss_db, platform.defaults.u_insertion_loss_db).u,
  }));
}

const uFrom = (rows: readonly { readonly u_insertion_loss_db: number | null }[]): TraitRow["u_from"] =>
  rows.every((r) => r.u_insertion_loss_db !== null) ? "stated" : "platform";

function fitOne(readings: LotReadings, rows: CutbackRecord[], level: number, out: Reduced): void {
  const first = rows[0]!;
  const fit = fitCutback(pointsOf(readings, rows), level);
  if (isRefused(fit)) {
    out.remarks.push({
      code: "cutback_refused",
      unit: first.unit,
      statement: `${where(first)}: ${fit.refused}`,
    });
    return;
  }
  pushFit(readings, fit, rows, first, "cut-back line", out, (k) => rows[k.point]!);
}

function fitDie(readings: LotReadings, lines: CutbackRecord[][], level: number, out: Reduced): void {
  const first = lines[0]![0]!;
  const fit = fitCommonSlope(lines.map((rows) => pointsOf(readings, rows)), level);
  if (isRefused(fit)) {
    out.remarks.push({
      code: "cutback_refused",
      unit: first.die_id ?? first.wafer,
      statement: `${where(first)}: ${fit.refused}`,
    });
    return;
  }
  const scope = first.die_id === null ? "wafer" as const : "die" as const;
  const place = { ...first, scope, unit: first.die_id ?? first.wafer, guide_id: null };
  const used = fit.used.map((k) => lines[k.group]![k.point]!);
  pushFit(
    readings,
    fit,
    used,
    place,
    "cut-back, common slope of the die",
    out,
    (k) => lines[k.group]![k.point]!,
  );
}

function pushFit(
  { design }: LotReadings,
  { fit, slope_db_cm, coupling_db, covariance }: CutbackFit,
  rows: readonly CutbackRecord[],
  place: CutbackRecord,
  method: string,
  out: Reduced,
  rowOf: (k: { group: number; point: number }) => CutbackRecord,
): void {
  const poor = fit.pValue !== null && fit.pValue < POOR_FIT;
  const widen = poor ? fit.scatterFactor : 1;
  const common = {
    ...placeOf(place, design),
    wavelength_nm: place.wavelength_nm,
    polarisation: place.polarisation,
    process: null,
    u_from: fit.uncertainty === "scatter" ? "fit" as const : uFrom(rows),
    method,
    readings: refsOf("cutback", rows),
    detail: fit.chiSquared === null
      ? null
      : `chi-squared ${fit.chiSquared.toFixed(2)} on ${fit.degreesOfFreedom} ${
        fit.degreesOfFreedom === 1 ? "degree" : "degrees"
      } of freedom` +
        (poor ? `; u widened by ${widen.toFixed(2)} to cover the scatter` : ""),
  };
  out.traits.push({ ...common, trait: "loss_db_cm", value: slope_db_cm.value, u: slope_db_cm.u * widen });
  if (coupling_db.length === 1) {
    out.traits.push({
      ...common,
      trait: "coupling_db",
      value: coupling_db[0]!.value,
      u: coupling_db[0]!.u * widen,
      detail: [
        ...common.detail === null ? [] : [common.detail],
        // One line gives both: what its slope errs up, its intercept errs down.
        ...slope_db_cm.u > 0
          ? [
            `correlation with the slope ${(covariance[0]! / (slope_db_cm.u * coupling_db[0]!.u)).toFixed(3)}`,
          ]
          : [],
      ].join("; ") || null,
    });
  }
  if (poor) {
    out.remarks.push({
      code: "cutback_scatter",
      unit: place.unit,
      statement: `${where(place)}: cut-back readings scatter more than their u (${
        fit.pValue! < 1e-4 ? "p < 0.0001" : `p = ${fit.pValue!.toPrecision(2)}`
      })`,
    });
  }
  for (const k of fit.outliers) {
    const row = rowOf(k);
    out.remarks.push({
      code: "cutback_outlier",
      unit: place.unit,
      statement: `${
        where(place)
      }: ${row.insertion_loss_db} dB at ${row.length_mm} mm (${row.file_name}:${row.source_line}) is off the line; it is kept`,
    });
  }
}

const where = (r: { unit: string; wavelength_nm: number; polarisation: string }): string =>
  `${r.unit} at ${r.wavelength_nm} nm ${r.polarisation}`;

/** Fringe contrast: loss of a guide between its own facets, bare or coated. */
export function reduceFringes(readings: LotReadings): Reduced {
  const out: Reduced = { traits: [], remarks: [] };
  for (const reading of readings.fringes) {
    const guide = guideOf(readings, reading);
    const refuse = (why: string) =>
      out.remarks.push({
        code: "fringes_refused",
        unit: reading.unit,
        statement: `${where(reading)} (${reading.file_name}:${reading.source_line}): ${why}`,
      });
    if (typeof guide === "string") {
      refuse(guide);
      continue;
    }
    const reflectivity = facetPair(readings, reading, guide);
    if (typeof reflectivity === "string") {
      refuse(reflectivity);
      continue;
    }
    const { u, from } = uncertaintyOf(reading.u_contrast, readings.platform.defaults.u_contrast);
    const loss = fringeLoss({ value: reading.contrast, u }, reflectivity, {
      value: mm(guide.length_mm),
      u: 0,
    });
    if (isRefused(loss)) {
      refuse(loss.refused);
      continue;
    }
    out.traits.push({
      ...placeOf(reading, readings.design),
      trait: "loss_db_cm",
      wavelength_nm: reading.wavelength_nm,
      polarisation: reading.polarisation,
      process: null,
      value: toDbPerCm(loss.alpha.value),
      u: toDbPerCm(loss.alpha.u),
      u_from: from,
      method: `fringe contrast, ${reading.facet_state} facets`,
      readings: [...refsOf("fringes", [reading]), ...refsOf("facets", reflectivity.witnesses)],
      detail: `facet reflectivity ${reflectivity.value.toPrecision(4)}, u ${reflectivity.u.toPrecision(2)}`,
    });
  }
  return out;
}

/** The guide of a reading; a die-level one may stand for guides that have one length and width. */
function guideOf({ design }: LotReadings, reading: FringesRecord): GuideRecord | string {
  if (reading.guide_id !== null) return design.guideById.get(reading.guide_id)!;
  const guides = reading.die_id === null
    ? design.guides.filter((g) => g.wafer === reading.wafer)
    : design.guidesOfDie.get(reading.die_id) ?? [];
  const first = guides[0];
  if (first === undefined) return "no guide to take the length from";
  if (guides.some((g) => g.length_mm !== first.length_mm || g.width_um !== first.width_um)) {
    return "the reading names no guide, and the guides it may belong to differ in length or width";
  }
  return first;
}

/** A reflectivity and the witness readings that it is from; none for bare facets. */
interface FacetPair extends Uncertain {
  readonly witnesses: readonly FacetsRecord[];
}

/** R = √(R_in·R_out) at the reading's wavelength, or why it is not known. */
function facetPair(readings: LotReadings, reading: FringesRecord, guide: GuideRecord): FacetPair | string {
  const lambda = nm(reading.wavelength_nm);
  const { index } = readings.model;
  let bare: Uncertain;
  try {
    // A fringe scan is taken at room temperature; the index moves R by less than 1e-5 per kelvin.
    const n = index.nEff(reading.polarisation, lambda, 25, geometryOf(guide));
    bare = bareReflectivity({ value: n, u: 0 }, readings.model.outsideIndex);
  } catch (error) {
    if (error instanceof RangeError) return error.message;
    throw error;
  }
  if (reading.facet_state === "bare") {
    return bare.value > 0
      ? { ...bare, witnesses: [] }
      : "a bare facet against its own index makes no fringes";
  }
  const facets = (["in", "out"] as const).map((facet) => {
    const coating = readings.design.coatingOf.get(`${guide.die_id}|${facet}`);
    if (coating === undefined) return { value: bare, run: null, witnesses: [] };
    const spectrum = spectrumOf(readings, coating.coating_run, facet);
    const found = coatedReflectivity(spectrum, lambda);
    if (isRefused(found)) return `${facet} facet: ${found.refused}`;
    return { value: found, run: coating.coating_run, witnesses: found.used.map((k) => spectrum[k]!.reading) };
  });
  const missing = facets.find((f) => typeof f === "string");
  if (missing !== undefined) return missing as string;
  const [a, b] = facets as { value: Uncertain; run: string | null; witnesses: FacetsRecord[] }[];
  if (a!.run === null && b!.run === null) return "read as coated, but lot.json lists no coating of this die";
  for (const { value } of [a!, b!]) {
    if (!(value.value > 0 && value.value < 1)) {
      return `a facet of reflectivity ${value.value} makes no fringes that tell a loss`;
    }
  }
  const mean = meanReflectivity(a!.value, b!.value, a!.run === b!.run ? 1 : 0);
  return { value: mean.value, u: mean.u, witnesses: [...a!.witnesses, ...b!.witnesses] };
}

/** Readings of a coating run's witness for one facet. */
export function spectrumOf(
  readings: Pick<LotReadings, "facets" | "platform">,
  run: string,
  facet: "in" | "out",
) {
  return readings.facets.filter((f) => f.coating_run === run && f.facet === facet).map((f) => ({
    lambda: nm(f.wavelength_nm),
    reading: f,
    reflectivity: f.reflectivity,
    u: uncertaintyOf(f.u_reflectivity, readings.platform.defaults.u_reflectivity).u,
  }));
}
