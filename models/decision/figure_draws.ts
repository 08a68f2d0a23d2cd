// Pure: no I/O, no clock, no hidden randomness.
import type { Outcome } from "../pairs/mod.ts";

/** Draws of named figures: NaN where a draw has no value, with the first reason that was given. */
export class FigureDraws<Name extends string> {
  readonly #draws = new Map<Name, Float64Array>();
  readonly #reasons = new Map<Name, string>();

  /** @param count how many draws there are */
  constructor(readonly count: number) {}

  /** Draws of a figure; made, all NaN, when it is first asked for. */
  of(name: Name): Float64Array {
    let draws = this.#draws.get(name);
    if (draws === undefined) {
      draws = new Float64Array(this.count).fill(NaN);
      this.#draws.set(name, draws);
    }
    return draws;
  }

  set(name: Name, k: number, outcome: Outcome): void {
    const draws = this.of(name);
    if (outcome.value !== null) draws[k] = outcome.value;
    else if (!this.#reasons.has(name)) this.#reasons.set(name, outcome.reason);
  }

  /** The same value in every draw, or none for one reason. */
  fill(name: Name, outcome: Outcome): void {
    if (outcome.value !== null) this.of(name).fill(outcome.value);
    else {
      this.of(name);
      this.#reasons.set(name, outcome.reason);
    }
  }

  names(): Name[] {
    return [...this.#draws.keys()];
  }

  reason(name: Name): string | null {
    return this.#reasons.get(name) ?? null;
  }
}
