// Pure: no I/O, no clock, no hidden randomness.
// The index of a material: one chosen set per axis, with hard limits beyond which there is no answer.
import { SELLMEIER_SETS, type SellmeierSet } from "./sellmeier_sets.ts";

/** `CLN` is congruent LiNbO3, `MgO:CLN` the same with 5 % MgO, `KTP` is KTiOPO4. */
export type Material = "KTP" | "CLN" | "MgO:CLN";
export const MATERIALS: readonly Material[] = ["KTP", "CLN", "MgO:CLN"];

/** Crystal axis along which the field points. LiNbO3: z and e are the same, x, y and o are the same. */
export type CrystalAxis = "x" | "y" | "z" | "o" | "e";

interface AxisIndex {
  readonly material: Material;
  readonly axis: CrystalAxis;
  readonly set: SellmeierSet;
  /** Hard limits, m. */
  readonly from: number;
  readonly to: number;
}

/** Hard limits of temperature for every material, °C. */
const COLDEST = 5;
const HOTTEST = 250;
/** A wavelength converted from nm may miss a limit by rounding only. */
const ROUNDING = 1e-12;

function axisIndex(
  material: Material,
  axis: CrystalAxis,
  set: SellmeierSet,
  um: [number, number],
): AxisIndex {
  return { material, axis, set, from: um[0] * 1e-6 * (1 - ROUNDING), to: um[1] * 1e-6 * (1 + ROUNDING) };
}

function birefringent(
  material: Material,
  o: SellmeierSet,
  oRange: [number, number],
  e: SellmeierSet,
  eRange: [
    number,
    number,
  ],
): Record<CrystalAxis, AxisIndex> {
  return {
    x: axisIndex(material, "x", o, oRange),
    y: axisIndex(material, "y", o, oRange),
    o: axisIndex(material, "o", o, oRange),
    z: axisIndex(material, "z", e, eRange),
    e: axisIndex(material, "e", e, eRange),
  };
}

const TABLE: Record<Material, Record<CrystalAxis, AxisIndex | null>> = {
  "CLN": birefringent("CLN", SELLMEIER_SETS.el_o, [0.4, 4], SELLMEIER_SETS.jundt_e, [0.4, 4]),
  "MgO:CLN": birefringent("MgO:CLN", SELLMEIER_SETS.gayer5_o, [0.5, 1.7], SELLMEIER_SETS.gayer5_e, [0.5, 4]),
  // König & Wong and Fradkin give no n_x: that axis takes Kato & Takaoka.
  "KTP": {
    x: axisIndex("KTP", "x", SELLMEIER_SETS.kato_x, [0.45, 3.5]),
    y: axisIndex("KTP", "y", SELLMEIER_SETS.ktp_y, [0.45, 3.5]),
    z: axisIndex("KTP", "z", SELLMEIER_SETS.ktp_z, [0.45, 3.5]),
    o: null,
    e: null,
  },
};

function lookUp(material: Material, axis: CrystalAxis): AxisIndex {
  const found = TABLE[material]?.[axis];
  if (!found) {
    throw new RangeError(
      TABLE[material] === undefined
        ? `Cannot find the index of material ${JSON.stringify(material)}: need one of ${MATERIALS.join(", ")}`
        : `Cannot find the index of ${material} along axis ${JSON.stringify(axis)}: need ${
          material === "KTP" ? "x, y or z" : "o, e, x, y or z"
        }`,
    );
  }
  return found;
}

function refuse(entry: AxisIndex, lambda: number, temperatureC: number): never {
  const { material, axis } = entry;
  if (!(lambda >= entry.from && lambda <= entry.to)) {
    throw new RangeError(
      `Cannot evaluate the index of ${material} along ${axis}: found wavelength ${
        Number((lambda * 1e9).toPrecision(12))
      } nm, need ${Math.round(entry.from * 1e9)} to ${Math.round(entry.to * 1e9)} nm`,
    );
  }
  throw new RangeError(
    `Cannot evaluate the index of ${material} along ${axis}: found temperature ${temperatureC} °C, need ${COLDEST} to ${HOTTEST} °C`,
  );
}

const inside = (entry: AxisIndex, lambda: number, T: number): boolean =>
  lambda >= entry.from && lambda <= entry.to && T >= COLDEST && T <= HOTTEST;

/**
 * Refractive index of the bulk crystal. `lambda`: vacuum wavelength, m; `temperatureC`: °C.
 * Sources: the set of the material and axis in `SELLMEIER_SETS`.
 * @throws RangeError outside the hard limits, or for an axis the material does not have
 */
export function refractiveIndex(
  material: Material,
  axis: CrystalAxis,
  lambda: number,
  temperatureC: number,
): number {
  const entry = lookUp(material, axis);
  if (!inside(entry, lambda, temperatureC)) refuse(entry, lambda, temperatureC);
  return entry.set.index(lambda * 1e6, temperatureC);
}

/** Group index n − λ·dn/dλ of the bulk crystal by the analytic derivative; arguments and errors as `refractiveIndex`. */
export function groupIndex(
  material: Material,
  axis: CrystalAxis,
  lambda: number,
  temperatureC: number,
): number {
  const entry = lookUp(material, axis);
  if (!inside(entry, lambda, temperatureC)) refuse(entry, lambda, temperatureC);
  const L = lambda * 1e6;
  return entry.set.index(L, temperatureC) - L * entry.set.slope(L, temperatureC);
}

/** Hard limits of a material along an axis: vacuum wavelength in m, temperature in °C. @throws RangeError for an unknown axis */
export function materialRange(
  material: Material,
  axis: CrystalAxis,
): { lambda: [number, number]; temperatureC: [number, number] } {
  const { from, to } = lookUp(material, axis);
  return { lambda: [from, to], temperatureC: [COLDEST, HOTTEST] };
}

/** The published equation behind a material's axis. @throws RangeError for an unknown axis */
export function indexSource(material: Material, axis: CrystalAxis): string {
  return lookUp(material, axis).set.source;
}

/**
 * A sentence if the point lies outside the range for which the index was published (the answer is then an
 * extrapolation of its formula), else null. Arguments and errors as `refractiveIndex`.
 */
export function publishedRangeRemark(
  material: Material,
  axis: CrystalAxis,
  lambda: number,
  temperatureC: number,
): string | null {
  const entry = lookUp(material, axis);
  if (!inside(entry, lambda, temperatureC)) refuse(entry, lambda, temperatureC);
  const { set } = entry;
  const L = lambda * 1e6;
  const beyond: string[] = [];
  if (outside(L, set.published_um)) beyond.push(`index published for ${span(set.published_um)} µm`);
  if (set.published_c !== undefined && outside(temperatureC, set.published_c)) {
    beyond.push(`published for ${span(set.published_c)} °C`);
  }
  const referenceC = set === SELLMEIER_SETS.kato_x ? 20 : 25; // the temperature part vanishes there
  if (set.thermal_um !== undefined && temperatureC !== referenceC && outside(L, set.thermal_um)) {
    beyond.push(`temperature dependence published for ${span(set.thermal_um)} µm`);
  }
  if (beyond.length === 0) return null;
  return `beyond_published_range: ${material} ${axis} at ${Number((L * 1000).toFixed(3))} nm and ${
    Number(temperatureC.toFixed(2))
  } °C (${beyond.join("; ")}: ${set.source})`;
}

const outside = (x: number, [lo, hi]: readonly [number, number]): boolean =>
  x < lo * (1 - ROUNDING) || x > hi * (1 + ROUNDING);
const span = ([lo, hi]: readonly [number, number]): string => `${lo} to ${hi}`;
