import type { Problem } from "./issues.ts";
import type { KnownGuide, KnownIds } from "./known_ids.ts";

/** An unbroken run of accepted walls of one guide: line `line + k` holds `positions_um[k]`. */
export interface WallRun {
  readonly guide: KnownGuide;
  readonly line: number;
  readonly lastLine: number;
  readonly positions_um: Float64Array;
  /** Wall rows of the guide kept aside so far in the file. */
  readonly quarantined: number;
  readonly measured_at: string | null;
  readonly instrument: string | null;
}

/**
 * Packs wall rows, one by one, into runs. Walls of a guide have to ascend through the whole file, also when its rows are
 * not together. A row kept aside counts against its guide; when it does not say whose it is, against the guides of the
 * rows before and after it: one missing wall flips all domains that follow.
 */
export class WallRuns {
  readonly #last: Float64Array;
  readonly #bad: Int32Array;
  readonly #badLine: Int32Array;
  readonly #told: Int32Array;
  #values = new Float64Array(1024);
  #count = 0;
  #guide: KnownGuide | null = null;
  #line = 0;
  #nextLine = 0;
  #measured: string | null = null;
  #instrument: string | null = null;
  #orphans = 0;
  #strays: number[] = [];

  constructor(readonly known: KnownIds, readonly emit: (run: WallRun) => void) {
    this.#last = new Float64Array(known.guideCount);
    this.#bad = new Int32Array(known.guideCount);
    this.#badLine = new Int32Array(known.guideCount);
    this.#told = new Int32Array(known.guideCount);
  }

  /** Takes a wall in, or says why it cannot be. */
  wall(
    guide: KnownGuide,
    position: number,
    line: number,
    measured: string | null,
    instrument: string | null,
  ): Problem | null {
    if (guide === this.#guide) { for (const stray of this.#strays) this.bad(guide, stray); }
    this.#strays = [];
    const last = this.#last[guide.index]!;
    if (!(position > last && position < guide.length_mm * 1000)) {
      this.bad(guide, line);
      return wrongPlace(guide, position, last);
    }
    if (guide !== this.#guide || line !== this.#nextLine) {
      this.#flush();
      if (guide !== this.#guide) this.#bad[guide.index]! += this.#orphans;
      this.#guide = guide;
      this.#line = line;
      this.#measured = measured;
      this.#instrument = instrument;
      this.#orphans = 0;
    }
    if (this.#count === this.#values.length) {
      const wider = new Float64Array(2 * this.#count);
      wider.set(this.#values);
      this.#values = wider;
    }
    this.#values[this.#count++] = position;
    this.#last[guide.index] = position;
    this.#nextLine = line + 1;
    return null;
  }

  /** Notes a wall row that was kept aside; `guide` is whose it is or probably is, null when that cannot be told. */
  bad(guide: KnownGuide | null, line: number): void {
    const owner = guide ?? this.#guide;
    if (owner !== null) {
      this.#bad[owner.index]!++;
      this.#badLine[owner.index] = line;
    }
    // The guide that comes next may as well be the one that lost a wall.
    if (guide === null) this.#orphans++;
  }

  /**
   * Notes a wall row of a guide that the mask doesn't have and that is no misspelling of one. In the middle of a guide's
   * walls it is taken for one of them; before, behind or between the walls of others it is nobody's.
   */
  stray(line: number): void {
    this.#strays.push(line);
  }

  /** Hands on the last run, and the counts that came after their guide's last run. */
  end(): void {
    this.#flush();
    for (const guide of this.known.guides()) {
      const quarantined = this.#bad[guide.index]!;
      if (quarantined === this.#told[guide.index]) continue;
      const line = this.#badLine[guide.index]!;
      this.emit({
        guide,
        line,
        lastLine: line,
        positions_um: new Float64Array(0),
        quarantined,
        measured_at: null,
        instrument: null,
      });
    }
  }

  #flush(): void {
    if (this.#guide === null || this.#count === 0) return;
    const quarantined = this.#bad[this.#guide.index]!;
    this.#told[this.#guide.index] = quarantined;
    this.emit({
      guide: this.#guide,
      line: this.#line,
      lastLine: this.#nextLine - 1,
      positions_um: this.#values.slice(0, this.#count),
      quarantined,
      measured_at: this.#measured,
      instrument: this.#instrument,
    });
    this.#count = 0;
  }
}

function wrongPlace(guide: KnownGuide, position: number, last: number): Problem {
  const length = guide.length_mm * 1000;
  const inside = position > 0 && position < length;
  return {
    column: "position_um",
    value: String(position),
    reason: !inside
      ? `the wall is outside the guide (0…${length} µm, facets not counted)`
      : position === last
      ? "the wall repeats the one before on this guide"
      : `the wall is out of order: the guide already has one at ${last} µm`,
    wanted: inside
      ? `a position above ${last} µm; a second inspection goes into a file of its own`
      : `a position between 0 and ${length} µm`,
  };
}
