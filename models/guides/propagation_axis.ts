// Pure: no I/O, no clock, no hidden randomness.
import type { CrystalAxis, Material } from "../materials/mod.ts";
import type { PolarisationAxes } from "./index_model.ts";

const isOptic = (axis: CrystalAxis): boolean => axis === "z" || axis === "e";

/**
 * Crystal axis along which the guide runs: the one that neither polarisation sees. LiNbO3: `o` (perpendicular to the
 * optic axis) if one polarisation sees z ≡ e, else `z`. This is the direction whose expansion stretches the poling.
 * @throws RangeError if both polarisations see the same axis, which no guide does
 */
export function propagationAxis(material: Material, axes: PolarisationAxes): CrystalAxis {
  const { TE, TM } = axes;
  const same = material === "KTP" || TE === "x" || TE === "y" ? TE === TM : isOptic(TE) && isOptic(TM);
  if (same) {
    throw new RangeError(`Cannot tell the propagation axis: TE and TM both see ${TE}, need two axes`);
  }
  if (material !== "KTP") return isOptic(TE) || isOptic(TM) ? "o" : "z";
  const rest = (["x", "y", "z"] as const).find((axis) => axis !== TE && axis !== TM);
  if (rest === undefined || ![TE, TM].every((axis) => axis === "x" || axis === "y" || axis === "z")) {
    throw new RangeError(`Cannot tell the propagation axis of KTP: found axes ${TE} and ${TM}, need x, y, z`);
  }
  return rest;
}
