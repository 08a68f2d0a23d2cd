// Pure: no I/O, no clock, no hidden randomness.

/** No value, and why: a reading that cannot mean what it claims is refused rather than turned into a number. */
export interface Refused {
  /** A sentence for the output's `reason`. */
  readonly refused: string;
}

/** True for a result that was refused. */
export function isRefused(result: object): result is Refused {
  return "refused" in result;
}
