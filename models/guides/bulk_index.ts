// Pure: no I/O, no clock, no hidden randomness.
import {
  groupIndex,
  type Material,
  materialRange,
  publishedRangeRemark,
  refractiveIndex,
} from "../materials/mod.ts";
import type { IndexModel, PolarisationAxes } from "./index_model.ts";

/**
 * n_eff = index of the crystal: straight comparison with handbook numbers, no dependence on the cross-section.
 * @throws RangeError if the material has no such axis
 */
export function bulkIndexModel(material: Material, axes: PolarisationAxes): IndexModel {
  materialRange(material, axes.TE); // refuses an unknown axis now, not at the first use
  materialRange(material, axes.TM);
  return {
    from: "bulk",
    nEff: (pol, lambda, temperatureC) => refractiveIndex(material, axes[pol], lambda, temperatureC),
    groupIndex: (pol, lambda, temperatureC) => groupIndex(material, axes[pol], lambda, temperatureC),
    slice: (pol, temperatureC) => ({
      n: (lambda) => refractiveIndex(material, axes[pol], lambda, temperatureC),
      ng: (lambda) => groupIndex(material, axes[pol], lambda, temperatureC),
    }),
    overTemperature: (pol, lambda) => (temperatureC) =>
      refractiveIndex(material, axes[pol], lambda, temperatureC),
    sensitivity: () => 0,
    range: (pol) => materialRange(material, axes[pol]),
    remark: (pol, lambda, temperatureC) => publishedRangeRemark(material, axes[pol], lambda, temperatureC),
  };
}
