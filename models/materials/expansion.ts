// Pure: no I/O, no clock, no hidden randomness.
import { REFERENCE_TEMPERATURE_C } from "../../shared/constants.ts";
import { type CrystalAxis, type Material, materialRange } from "./refractive_index.ts";

/** First and second coefficient of length(T)/length(25 °C) − 1, 1/K and 1/K². */
interface Expansion {
  readonly first: number;
  readonly second: number;
}

// Y. S. Kim & R. T. Smith, J. Appl. Phys. 40, 4637 (1969); from memory (transcriptions round the second term to 5e-9).
const LN_ACROSS_C: Expansion = { first: 1.54e-5, second: 5.3e-9 };
const LN_ALONG_C: Expansion = { first: 0.75e-5, second: -7.7e-9 };
// S. Emanueli & A. Arie, Appl. Opt. 42, 6661 (2003); from memory.
const KTP_X: Expansion = { first: 6.7e-6, second: 11e-9 };

function expansionOf(material: Material, propagation: CrystalAxis): Expansion {
  if (material === "KTP") {
    if (propagation === "x") return KTP_X;
    throw new RangeError(
      `Cannot expand KTP along ${
        JSON.stringify(propagation)
      }: a published expansion is at hand for propagation along x only`,
    );
  }
  return propagation === "z" || propagation === "e" ? LN_ALONG_C : LN_ACROSS_C;
}

/**
 * length(T)/length(25 °C) along the propagation direction: second-order polynomial in T − 25 °C.
 * LiNbO3 (doped or not): x, y, o are perpendicular to the optic axis, z and e along it. KTP: x only.
 * @throws RangeError for a direction without a published expansion, or beyond the material's temperatures
 */
export function expansionFactor(material: Material, propagation: CrystalAxis, temperatureC: number): number {
  const { temperatureC: [coldest, hottest] } = materialRange(material, propagation);
  const { first, second } = expansionOf(material, propagation);
  if (!(temperatureC >= coldest && temperatureC <= hottest)) {
    throw new RangeError(
      `Cannot expand ${material}: found temperature ${temperatureC} °C, need ${coldest} to ${hottest} °C`,
    );
  }
  const t = temperatureC - REFERENCE_TEMPERATURE_C;
  return 1 + t * (first + t * second);
}
