// Pure: no I/O, no clock, no hidden randomness.
import type { CrossSection } from "./cross_section.ts";
import { type FieldKind, modeMatrix, rayleighQuotient } from "./mode_matrix.ts";
import type { SolvedMode } from "./solve_guide.ts";

/**
 * Change of μ = N² − substrate² between two cross-sections close to the one solved, to second order in their distance
 * from it if they lie on both sides: the Rayleigh quotient of the solved field in each (Hellmann–Feynman). Not for a
 * jump of the index that moves: it does not leave its grid line.
 */
export function responseOfMode(
  mode: SolvedMode,
  from: CrossSection,
  to: CrossSection,
  field?: FieldKind,
): number {
  const x = { nodes: mode.x, low: mode.parity === "even" ? "mirror" : "zero", high: "zero" } as const;
  const y = { nodes: mode.y, low: "zero", high: "zero" } as const;
  const quotient = (section: CrossSection) =>
    rayleighQuotient(modeMatrix(section, x, y, mode.lambda, field), mode.vector);
  return quotient(to) - quotient(from);
}
