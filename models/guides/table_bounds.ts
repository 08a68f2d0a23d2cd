// Pure: no I/O, no clock, no hidden randomness.
import { type Material, refractiveIndex } from "../materials/mod.ts";
import type { PolarisationAxes } from "./index_model.ts";
import { silicaIndex } from "./ridge.ts";
import type { IndexTableRow } from "./table_index.ts";

/**
 * What a guide stands on: silica, another material of this index, or (a diffused guide) the crystal itself; `unknown`, air
 * at the least.
 */
export type TableSubstrate = "silica" | "crystal" | "unknown" | number;

/** No diffusion or exchange raises an index by more; common practice, no source. */
const LARGEST_INCREASE = 0.2;

/**
 * A guided mode's index lies above that of everything the light could escape to and below that of the core: for a film
 * between its substrate and the film's bulk index, for a diffused guide between bulk and a little more. A table that
 * says otherwise has its units, columns or polarisations mixed up.
 * @throws RangeError naming the first node that does not, with both limits
 */
export function checkTableBounds(
  rows: readonly IndexTableRow[],
  material: Material,
  axes: PolarisationAxes,
  substrate: TableSubstrate,
): void {
  for (const row of rows) {
    const lambda = row.wavelength_nm * 1e-9;
    const bulk = refractiveIndex(material, axes[row.polarisation], lambda, row.temperature_c);
    const [low, high] = substrate === "crystal" || substrate === "unknown"
      ? [substrate === "crystal" ? bulk : 1, bulk + LARGEST_INCREASE]
      : [substrate === "silica" ? silicaIndex(lambda) : substrate, bulk];
    if (row.n_eff > low && row.n_eff < high) continue;
    const { n_eff, ...node } = row;
    const place = Object.entries(node).map(([key, value]) => `${key} ${value}`).join(", ");
    const names = substrate === "crystal"
      ? [`the crystal's ${low.toFixed(5)}`, `${LARGEST_INCREASE} more`]
      : substrate === "unknown"
      ? ["air's 1", `${LARGEST_INCREASE} more than the crystal's ${bulk.toFixed(5)}`]
      : [`the substrate's ${low.toFixed(5)}`, `the film's ${high.toFixed(5)}`];
    throw new RangeError(
      `Cannot use the index table: found n_eff ${n_eff} at ${place}; a guided mode lies between ${
        names[0]
      } and ${names[1]}`,
    );
  }
}
