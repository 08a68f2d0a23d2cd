// Pure: no I/O, no clock, no hidden randomness.
import type { GuideGeometry, Polarisation } from "../../shared/vocabulary.ts";
import { groupIndex, type Material, publishedRangeRemark, refractiveIndex } from "../materials/mod.ts";
import { geometryColumns, geometryCorners, gridOf } from "./_grid.ts";
import { insideAxis, intervalOf, splineCurvatures, splineWeights } from "./_node_axis.ts";
import type {
  GeometryParameter,
  IndexModel,
  IndexRange,
  NominalGeometry,
  PolarisationAxes,
} from "./index_model.ts";

/** One node of an index table, in the units of the file. */
export interface IndexTableRow {
  readonly wavelength_nm: number;
  readonly polarisation: Polarisation;
  readonly temperature_c: number;
  readonly width_um: number;
  readonly film_thickness_nm?: number | undefined;
  readonly etch_depth_nm?: number | undefined;
  readonly titanium_nm?: number | undefined;
  readonly n_eff: number;
}

/**
 * Everything that is known of one polarisation. excess = n_eff − n_bulk and curvature = its second derivative in
 * wavelength (1/m²), both row-major over geometry (flattened), temperature, wavelength.
 */
interface Table {
  readonly parameters: readonly GeometryParameter[];
  readonly geometryAxes: readonly Float64Array[];
  readonly temperatures: Float64Array;
  readonly temperatureCurvatures: Float64Array;
  /** m */
  readonly lambdas: Float64Array;
  readonly excess: Float64Array;
  readonly curvature: Float64Array;
}

/** n_eff − n_bulk over the wavelength nodes, at one temperature and geometry. */
interface Line {
  readonly excess: Float64Array;
  readonly curvature: Float64Array;
}

/**
 * n_eff from a table (formats: two CSVs beside the platform file). The table must be a full grid over wavelength,
 * temperature, width and the other geometry columns it has, for each polarisation it has. What is interpolated is
 * n_eff − n_bulk, smooth by nature: cubic splines (not-a-knot, C²) in wavelength and temperature, cubic Hermite (C¹,
 * local) in geometry; parabola, line or constant where an axis has three, two or one nodes. Nothing beyond the table.
 * `nominal`: geometry of a guide that does not state it.
 * @throws RangeError for a grid with holes (names the node), an index below 1, or a node without bulk index
 */
export function tableIndexModel(
  rows: readonly IndexTableRow[],
  material: Material,
  axes: PolarisationAxes,
  nominal: NominalGeometry = {},
): IndexModel {
  const tables: Partial<Record<Polarisation, Table>> = {};
  for (const pol of ["TE", "TM"] as const) {
    const own = rows.filter((row) => row.polarisation === pol);
    if (own.length > 0) tables[pol] = tableOf(own, material, axes[pol], pol);
  }
  if (Object.keys(tables).length === 0) {
    throw new RangeError("Cannot use the index table: it has no row with polarisation TE or TM");
  }
  const tableFor = (pol: Polarisation): Table => {
    const table = tables[pol];
    if (table !== undefined) return table;
    throw new RangeError(`Cannot look up the table: it has no rows of polarisation ${pol}`);
  };

  /** Excess index (and its slope, 1/m) at one point, from the two nodes around λ only. */
  const excessAt = (
    pol: Polarisation,
    lambda: number,
    temperatureC: number,
    geometry: GuideGeometry,
    along: GeometryParameter | null,
    order: 0 | 1,
  ): number => {
    const table = tableFor(pol);
    const x = insideAxis(table.lambdas, lambda, "wavelength_nm", 1e9);
    const k = intervalOf(table.lambdas, x);
    const line = lineOf(
      table,
      temperatureC,
      geometry,
      nominal,
      along,
      k,
      Math.min(k + 2, table.lambdas.length),
    );
    return order === 0 ? valueOn(table.lambdas, line, k, x) : slopeOn(table.lambdas, line, k, x);
  };

  return {
    from: "table",
    nEff: (pol, lambda, temperatureC, geometry) =>
      excessAt(pol, lambda, temperatureC, geometry, null, 0) +
      refractiveIndex(material, axes[pol], lambda, temperatureC),
    groupIndex: (pol, lambda, temperatureC, geometry) =>
      excessAt(pol, lambda, temperatureC, geometry, null, 0) -
      lambda * excessAt(pol, lambda, temperatureC, geometry, null, 1) +
      groupIndex(material, axes[pol], lambda, temperatureC),
    slice(pol, temperatureC, geometry) {
      const table = tableFor(pol);
      const { lambdas } = table;
      const line = lineOf(table, temperatureC, geometry, nominal, null, 0, lambdas.length);
      return {
        n(lambda) {
          const x = insideAxis(lambdas, lambda, "wavelength_nm", 1e9);
          return valueOn(lambdas, line, intervalOf(lambdas, x), x) +
            refractiveIndex(material, axes[pol], lambda, temperatureC);
        },
        ng(lambda) {
          const x = insideAxis(lambdas, lambda, "wavelength_nm", 1e9);
          const k = intervalOf(lambdas, x);
          return valueOn(lambdas, line, k, x) - x * slopeOn(lambdas, line, k, x) +
            groupIndex(material, axes[pol], lambda, temperatureC);
        },
      };
    },
    overTemperature(pol, lambda, geometry) {
      const table = tableFor(pol);
      const { temperatures } = table;
      const values = excessOverTemperature(table, lambda, geometry, nominal);
      const line = { excess: values, curvature: curvaturesOf(table.temperatureCurvatures, values) };
      return (temperatureC) => {
        const T = insideAxis(temperatures, temperatureC, "temperature_c");
        return valueOn(temperatures, line, intervalOf(temperatures, T), T) +
          refractiveIndex(material, axes[pol], lambda, temperatureC);
      };
    },
    sensitivity(pol, lambda, temperatureC, geometry, parameter) {
      if (!tableFor(pol).parameters.includes(parameter)) return 0;
      return excessAt(pol, lambda, temperatureC, geometry, parameter, 0);
    },
    range(pol) {
      const { lambdas, temperatures, parameters, geometryAxes } = tableFor(pol);
      const range: IndexRange = { lambda: ends(lambdas), temperatureC: ends(temperatures) };
      parameters.forEach((parameter, d) => range[parameter] = ends(geometryAxes[d]!));
      return range;
    },
    remark: (pol, lambda, temperatureC) => publishedRangeRemark(material, axes[pol], lambda, temperatureC),
  };
}

const ends = (axis: Float64Array): [number, number] => [axis[0]!, axis[axis.length - 1]!];

function tableOf(
  rows: readonly IndexTableRow[],
  material: Material,
  axis: PolarisationAxes["TE"],
  pol: Polarisation,
): Table {
  const parameters = geometryColumns(rows);
  const columns = [...parameters, "temperature_c", "wavelength_nm"];
  const grid = gridOf(rows, columns, "n_eff", `the index table (${pol})`);
  const temperatures = grid.axes[parameters.length]!;
  const nanometres = grid.axes[parameters.length + 1]!;
  const lambdas = nanometres.map((x) => x * 1e-9);
  const nT = temperatures.length;
  const nL = lambdas.length;
  const excess = grid.values.map((n, at) => {
    if (!(n >= 1)) {
      throw new RangeError(`Cannot use the index table (${pol}): found n_eff ${n}, need at least 1`);
    }
    return n - refractiveIndex(material, axis, lambdas[at % nL]!, temperatures[Math.floor(at / nL) % nT]!);
  });
  const S = splineCurvatures(lambdas);
  const curvature = new Float64Array(excess.length);
  for (let start = 0; start < excess.length; start += nL) {
    curvature.set(curvaturesOf(S, excess.subarray(start, start + nL)), start);
  }
  return {
    parameters,
    geometryAxes: grid.axes.slice(0, parameters.length),
    temperatures,
    temperatureCurvatures: splineCurvatures(temperatures),
    lambdas,
    excess,
    curvature,
  };
}

/** S·values: second derivatives at the nodes. */
function curvaturesOf(S: Float64Array, values: Float64Array): Float64Array {
  const n = values.length;
  const out = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    let sum = 0;
    for (let j = 0; j < n; j++) sum += S[i * n + j]! * values[j]!;
    out[i] = sum;
  }
  return out;
}

/** n_eff − n_bulk at the temperature nodes, at one wavelength and geometry. */
function excessOverTemperature(
  table: Table,
  lambda: number,
  geometry: GuideGeometry,
  nominal: NominalGeometry,
): Float64Array {
  const { lambdas, temperatures, parameters, geometryAxes } = table;
  const nL = lambdas.length;
  const x = insideAxis(lambdas, lambda, "wavelength_nm", 1e9);
  const k = intervalOf(lambdas, x);
  const { offsets, weights } = geometryCorners(parameters, geometryAxes, geometry, nominal, null);
  return Float64Array.from(temperatures, (_, t) => {
    let sum = 0;
    for (let c = 0; c < offsets.length; c++) {
      const start = (offsets[c]! * temperatures.length + t) * nL;
      const line = {
        excess: table.excess.subarray(start, start + nL),
        curvature: table.curvature.subarray(start, start + nL),
      };
      sum += weights[c]! * valueOn(lambdas, line, k, x);
    }
    return sum;
  });
}

/** The nodes from … to−1 of the wavelength axis, at one temperature and geometry (or differentiated along one parameter). */
function lineOf(
  table: Table,
  temperatureC: number,
  geometry: GuideGeometry,
  nominal: NominalGeometry,
  along: GeometryParameter | null,
  from: number,
  to: number,
): Line {
  const { parameters, geometryAxes, temperatures, temperatureCurvatures } = table;
  const nL = table.lambdas.length;
  const nT = temperatures.length;
  const T = insideAxis(temperatures, temperatureC, "temperature_c");
  const overT = splineWeights(temperatures, temperatureCurvatures, T);
  const { offsets, weights } = geometryCorners(parameters, geometryAxes, geometry, nominal, along);
  const excess = new Float64Array(nL);
  const curvature = new Float64Array(nL);
  for (let c = 0; c < offsets.length; c++) {
    for (let t = 0; t < nT; t++) {
      const w = weights[c]! * overT[t]!;
      if (w === 0) continue;
      const start = (offsets[c]! * nT + t) * nL;
      for (let l = from; l < to; l++) {
        excess[l]! += w * table.excess[start + l]!;
        curvature[l]! += w * table.curvature[start + l]!;
      }
    }
  }
  return { excess, curvature };
}

/** Cubic spline value on interval k from node values and second derivatives. */
function valueOn(nodes: Float64Array, { excess, curvature }: Line, k: number, x: number): number {
  if (nodes.length === 1) return excess[0]!;
  const h = nodes[k + 1]! - nodes[k]!;
  const b = (x - nodes[k]!) / h;
  const a = 1 - b;
  return a * excess[k]! + b * excess[k + 1]! +
    (a * (a * a - 1) * curvature[k]! + b * (b * b - 1) * curvature[k + 1]!) * h * h / 6;
}

/** Its slope per unit of the axis; 0 for a single node. */
function slopeOn(nodes: Float64Array, { excess, curvature }: Line, k: number, x: number): number {
  if (nodes.length === 1) return 0;
  const h = nodes[k + 1]! - nodes[k]!;
  const b = (x - nodes[k]!) / h;
  const a = 1 - b;
  return (excess[k + 1]! - excess[k]!) / h +
    ((1 - 3 * a * a) * curvature[k]! + (3 * b * b - 1) * curvature[k + 1]!) * h / 6;
}
