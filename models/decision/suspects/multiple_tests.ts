// Pure: no I/O, no clock, no hidden randomness.

/** How p-values are corrected for the number of things tried; both hold the chance of any false blame below the level. */
export type Correction = "holm" | "bonferroni";

/**
 * Corrected p-values in the order given. Holm (S. Holm, Scand. J. Stat. 6, 65 (1979)): in ascending order the i-th
 * (from 0) of m times m − i, never below the one before; it blames whatever Bonferroni (each times m) does, and
 * sometimes more.
 * @throws RangeError for a value outside 0…1
 */
export function correctPValues(p: readonly number[], correction: Correction): number[] {
  const wrong = p.find((x) => !(x >= 0 && x <= 1));
  if (wrong !== undefined) throw new RangeError(`Cannot correct a p-value of ${wrong}: need 0…1`);
  const m = p.length;
  if (correction === "bonferroni") return p.map((x) => Math.min(1, m * x));
  const corrected = new Array<number>(m);
  let before = 0;
  p.map((_, i) => i).sort((i, j) => p[i]! - p[j]!).forEach((i, rank) => {
    before = Math.min(1, Math.max(before, (m - rank) * p[i]!));
    corrected[i] = before;
  });
  return corrected;
}
