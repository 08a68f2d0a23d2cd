// Pure: no I/O, no clock, no hidden randomness.
// The index model of a solved design: interpolation of its table, never beyond it.
import type { GuideGeometry, Polarisation } from "../../../shared/vocabulary.ts";
import { groupIndex, publishedRangeRemark, refractiveIndex } from "../../materials/mod.ts";
import type { GeometryParameter, IndexModel, IndexRange } from "../index_model.ts";
import { chebyshevCoefficients, chebyshevDerivative, chebyshevSum } from "./chebyshev.ts";
import { designRemarks, geometryParameters, type ProcessParameter } from "./design.ts";
import { type DesignTable, type PolarisationTable, SOLVER_VERSION } from "./design_table.ts";
import { ModesCutOff } from "./modes_cut_off.ts";
import { polynomialWeights } from "./polynomial_weights.ts";

/** An index model that rests on solved modes. */
export interface SolverIndexModel extends IndexModel {
  readonly from: "solver";
  /** ∂n_eff/∂(process parameter) per unit of its name; 0 for a parameter that the process does not have. */
  processSensitivity(
    pol: Polarisation,
    lambda: number,
    temperatureC: number,
    geometry: GuideGeometry,
    parameter: ProcessParameter,
  ): number;
  /** Why a polarisation's table ends early or does not exist, or null. */
  cutOff(pol: Polarisation, geometry?: GuideGeometry, lambda?: number): string | null;
}

/** Chebyshev coefficients over wavelength: `width` per geometry node. */
interface Series {
  readonly width: number;
  readonly coefficients: Float64Array;
}

interface Solved {
  readonly table: PolarisationTable;
  readonly excess: Series;
  readonly perBulkIndex: Series;
  readonly perProcess: Map<string, Series>;
}

/**
 * n_eff from a solved table: n_eff − n_bulk by Chebyshev polynomials in wavelength and polynomials in the geometry
 * parameters; its small temperature dependence through the bulk index. A geometry that a guide does not state is the
 * design's middle.
 * @throws RangeError for a table of another version of the solver
 */
export function solverIndexModel(stored: DesignTable): SolverIndexModel {
  if (stored.version !== SOLVER_VERSION) {
    throw new RangeError(
      `Cannot use a table of solved modes: found version ${stored.version}, need ${SOLVER_VERSION}`,
    );
  }
  const { design, temperatureC: T0 } = stored;
  const { material, axes } = design;
  const parameters = geometryParameters(design.process);
  const geometryAxes = stored.geometry.map((nodes) => Float64Array.from(nodes));
  const solved = { TE: solvedOf(stored, "TE"), TM: solvedOf(stored, "TM") };

  const at = (pol: Polarisation): Solved => {
    const found = solved[pol];
    if ("reason" in found) throw new ModesCutOff(`Cannot look up a mode: ${found.reason}`);
    return found;
  };
  /** Place of λ in the table, −1 … 1. */
  const place = (
    pol: Polarisation,
    { lambda: [lo, hi], cutOff }: PolarisationTable,
    lambda: number,
  ): number => {
    if (!(lambda >= lo * (1 - 1e-9) && lambda <= hi * (1 + 1e-9))) {
      const message = `Cannot look up a mode: found wavelength_nm ${shown(lambda * 1e9)} for ${pol}, need ${
        shown(lo * 1e9)
      } to ${shown(hi * 1e9)}`;
      if (cutOff !== null && lambda > hi) throw new ModesCutOff(`${message}: ${cutOff}`);
      throw new RangeError(message);
    }
    return Math.min(1, Math.max(-1, (2 * lambda - lo - hi) / (hi - lo)));
  };
  const warm = (temperatureC: number): number => {
    const [lo, hi] = design.temperatureC;
    if (temperatureC >= lo - 1e-9 && temperatureC <= hi + 1e-9) return temperatureC;
    throw new RangeError(`Cannot look up a mode: found temperature_c ${temperatureC}, need ${lo} to ${hi}`);
  };
  const weightsOf = (geometry: GuideGeometry, along: GeometryParameter | null = null) =>
    polynomialWeights(parameters, geometryAxes, geometry, design.geometry, along);
  const bulk = (pol: Polarisation, lambda: number, T: number) =>
    refractiveIndex(material, axes[pol], lambda, T);
  const bulkGroup = (pol: Polarisation, lambda: number, T: number) =>
    groupIndex(material, axes[pol], lambda, T);

  /** n and group index at one temperature and geometry. */
  const slice = (pol: Polarisation, temperatureC: number, geometry: GuideGeometry) => {
    const T = warm(temperatureC);
    const { table, excess, perBulkIndex } = at(pol);
    const weights = weightsOf(geometry);
    const e = combined(excess, weights);
    const b = combined(perBulkIndex, weights);
    const perLambda = 2 / (table.lambda[1] - table.lambda[0]);
    let slopes: { e: Float64Array; b: Float64Array } | null = null; // made when a group index is asked for
    return {
      n(lambda: number) {
        const t = place(pol, table, lambda);
        const n = bulk(pol, lambda, T);
        return n + chebyshevSum(e, t) + chebyshevSum(b, t) * (n - bulk(pol, lambda, T0));
      },
      ng(lambda: number) {
        const t = place(pol, table, lambda);
        slopes ??= { e: chebyshevDerivative(e), b: chebyshevDerivative(b) };
        const warmed = bulk(pol, lambda, T) - bulk(pol, lambda, T0);
        const group = bulkGroup(pol, lambda, T);
        const slope = (chebyshevSum(slopes.e, t) + chebyshevSum(slopes.b, t) * warmed) * perLambda;
        return group + chebyshevSum(e, t) - lambda * slope +
          chebyshevSum(b, t) * (group - bulkGroup(pol, lambda, T0));
      },
    };
  };
  /** Σ of the weights times the series' values at t. */
  const valueAt = ({ width, coefficients }: Series, weights: Float64Array, t: number): number => {
    let sum = 0;
    for (let g = 0; g < weights.length; g++) {
      sum += weights[g]! * chebyshevSum(coefficients, t, g * width, width);
    }
    return sum;
  };

  return {
    from: "solver",
    nEff(pol, lambda, temperatureC, geometry) {
      const { table, excess, perBulkIndex } = at(pol);
      const t = place(pol, table, lambda);
      const weights = weightsOf(geometry);
      const n = bulk(pol, lambda, warm(temperatureC));
      return n + valueAt(excess, weights, t) +
        valueAt(perBulkIndex, weights, t) * (n - bulk(pol, lambda, T0));
    },
    groupIndex: (pol, lambda, temperatureC, geometry) => slice(pol, temperatureC, geometry).ng(lambda),
    slice,
    overTemperature(pol, lambda, geometry) {
      const { table, excess, perBulkIndex } = at(pol);
      const t = place(pol, table, lambda);
      const weights = weightsOf(geometry);
      const e = valueAt(excess, weights, t);
      const b = valueAt(perBulkIndex, weights, t);
      const cold = bulk(pol, lambda, T0);
      return (temperatureC) => {
        const n = bulk(pol, lambda, warm(temperatureC));
        return n + e + b * (n - cold);
      };
    },
    sensitivity(pol, lambda, temperatureC, geometry, parameter) {
      const { table, excess, perBulkIndex } = at(pol);
      const t = place(pol, table, lambda);
      if (!(parameters as readonly string[]).includes(parameter)) return 0;
      const warmed = bulk(pol, lambda, warm(temperatureC)) - bulk(pol, lambda, T0);
      const weights = weightsOf(geometry, parameter);
      return valueAt(excess, weights, t) + valueAt(perBulkIndex, weights, t) * warmed;
    },
    processSensitivity(pol, lambda, temperatureC, geometry, parameter) {
      const { table, perProcess } = at(pol);
      warm(temperatureC); // the response hardly depends on it; only its limits do
      const t = place(pol, table, lambda);
      const series = perProcess.get(parameter);
      return series === undefined ? 0 : valueAt(series, weightsOf(geometry), t);
    },
    range(pol) {
      const range: IndexRange = {
        lambda: [...at(pol).table.lambda],
        temperatureC: [...design.temperatureC],
      };
      parameters.forEach((parameter, d) => {
        const nodes = stored.geometry[d]!;
        range[parameter] = [nodes[0]!, nodes[nodes.length - 1]!];
      });
      return range;
    },
    remark(pol, lambda, temperatureC) {
      const bulkRemark = publishedRangeRemark(material, axes[pol], lambda, temperatureC);
      const all = [...bulkRemark === null ? [] : [bulkRemark], ...designRemarks(design, pol, lambda)];
      return all.length === 0 ? null : all.join("\n");
    },
    cutOff(pol) {
      const found = solved[pol];
      return "reason" in found ? found.reason : found.table.cutOff;
    },
  };
}

function solvedOf(stored: DesignTable, pol: Polarisation): Solved | { readonly reason: string } {
  const table = stored.polarisations[pol];
  if ("reason" in table) return table;
  const nodes = stored.geometry.reduce((product, list) => product * list.length, 1);
  const width = table.excess.length / nodes;
  const series = (values: readonly number[]): Series => {
    const coefficients = new Float64Array(values.length);
    for (let start = 0; start < values.length; start += width) {
      coefficients.set(chebyshevCoefficients(values.slice(start, start + width)), start);
    }
    return { width, coefficients };
  };
  return {
    table,
    excess: series(table.excess),
    perBulkIndex: series(table.perBulkIndex),
    perProcess: new Map(Object.entries(table.perProcess).map(([key, values]) => [key, series(values)])),
  };
}

/** Coefficients over wavelength at one geometry. */
function combined({ width, coefficients }: Series, weights: Float64Array): Float64Array {
  const out = new Float64Array(width);
  for (let g = 0; g < weights.length; g++) {
    const w = weights[g]!;
    for (let m = 0; m < width; m++) out[m]! += w * coefficients[g * width + m]!;
  }
  return out;
}

const shown = (x: number): number => Number(x.toPrecision(8));
