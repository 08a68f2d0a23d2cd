// Pure: no I/O, no clock, no hidden randomness.
// What was probably meant: for unknown keys, headings, kinds and ids.

/**
 * Edits (insert, delete, replace) that turn `a` into `b`, counted in UTF-16 units; texts beyond 100 units are cut first
 * (R. A. Wagner & M. J. Fischer, J. ACM 21, 168 (1974)).
 */
export function editDistance(a: string, b: string): number {
  const [s, t] = [a.slice(0, 100), b.slice(0, 100)];
  let above = Array.from({ length: t.length + 1 }, (_, j) => j);
  for (let i = 1; i <= s.length; i++) {
    const row = [i];
    for (let j = 1; j <= t.length; j++) {
      const replace = above[j - 1]! + (s[i - 1] === t[j - 1] ? 0 : 1);
      row.push(Math.min(replace, above[j]! + 1, row[j - 1]! + 1));
    }
    above = row;
  }
  return above[t.length]!;
}

/**
 * The word that `found` is most likely meant to be, or null when none is near: letters, digits and case apart first
 * (`IL (dB)` ~ `il_db`), then at most a third of the letters different, at most three.
 */
export function nearestWord(found: string, known: readonly string[]): string | null {
  const plain = bare(found);
  if (plain === "") return null;
  let best: string | null = null;
  let least = Math.min(3, Math.ceil(plain.length / 3)) + 1;
  for (const word of known) {
    const distance = editDistance(plain, bare(word));
    if (distance < least) [best, least] = [word, distance];
  }
  return best;
}

const bare = (word: string): string => word.toLowerCase().replace(/[^\p{L}\p{N}]/gu, "");

/**
 * The known id that `found` is most likely meant to be. An id is text: `5` is not `05`, but it probably means it. Tried in
 * turn: the same apart from case and zeros before digits; the last part of a full id (`K07-1/05` for `05`); one letter off.
 * Null when nothing, or more than one id, fits.
 */
export function nearestId(found: string, known: readonly string[]): string | null {
  const last = found.slice(found.lastIndexOf("/") + 1);
  if (last !== found && known.includes(last)) return last;
  const only = (fits: (id: string) => boolean): string | null => {
    const hits = known.filter(fits);
    return hits.length === 1 ? hits[0]! : null;
  };
  const folded = foldId(last);
  const same = only((id) => foldId(id) === folded);
  if (same !== null || found.length < 3) return same;
  return only((id) => Math.abs(id.length - last.length) <= 1 && editDistance(last, id) === 1);
}

const foldId = (id: string): string => id.toLowerCase().replace(/0*(\d+)/g, "$1");

/** ` (did you mean "x"?)`, or nothing. */
export const didYouMean = (word: string | null): string =>
  word === null ? "" : ` (did you mean ${JSON.stringify(word)}?)`;
