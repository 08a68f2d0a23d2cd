// Pure: no I/O, no clock, no hidden randomness.
// Ids are text, never numbers: wafer "K07-1", die "K07-1/05", guide "K07-1/05/g12".

/** Full die id from a wafer id and the die's own name: `K07-1` + `05` → `K07-1/05`. */
export const dieId = (wafer: string, die: string): string => `${wafer}/${die}`;
/** Full guide id: `K07-1` + `05` + `g12` → `K07-1/05/g12`. */
export const guideId = (wafer: string, die: string, guide: string): string => `${wafer}/${die}/${guide}`;
/** Die part of a full guide id. */
export const dieOfGuide = (guide: string): string => guide.slice(0, guide.lastIndexOf("/"));
/** Wafer part of a full die or guide id. */
export const waferOf = (id: string): string => id.split("/", 1)[0]!;
/** Orders ids so that equal text parts compare by number: g2 before g10. Ties fall back to plain text order. */
export function compareIds(a: string, b: string): number {
  return collator.compare(a, b) || (a < b ? -1 : a > b ? 1 : 0);
}
const collator = new Intl.Collator("en", { numeric: true });
