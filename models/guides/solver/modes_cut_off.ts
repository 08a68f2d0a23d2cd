// Pure: no I/O, no clock, no hidden randomness.

/** A mode was asked for that the guide does not carry: the answer is the reason, not a number. */
export class ModesCutOff extends RangeError {
  override readonly name = "ModesCutOff";
}
