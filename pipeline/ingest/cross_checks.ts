import type { ReadingKind } from "../../shared/schemas/readings.ts";
import type { Problem, Remarks } from "./issues.ts";
import type { Owner } from "./known_ids.ts";
import type { Values } from "./row_values.ts";

/** Sums of decimal millimetres in binary miss by less than this, mm. */
const SLACK_MM = 1e-6;

/** Values that a schema cannot refuse because it does not know the guide. Null when the row holds. */
export function impossibleOnGuide(kind: ReadingKind, values: Values, owner: Owner): Problem | null {
  const whose = owner.scope === "guide"
    ? `guide ${owner.unit} is`
    : `the longest guide of ${owner.scope} ${owner.unit} is`;
  const beyond = (column: string, end: number, what: string): Problem | null =>
    end <= owner.length_mm + SLACK_MM ? null : {
      column,
      value: String(values[column]),
      reason: `${what} ${Number(end.toPrecision(12))} mm, outside the guide`,
      wanted: `a place on the guide; ${whose} ${owner.length_mm} mm long`,
    };
  if (kind === "poling") {
    const end = Number(values["window_start_mm"]) + Number(values["window_length_mm"]);
    return beyond("window_length_mm", end, "the window ends at");
  }
  if (kind === "geometry" && values["z_mm"] !== null) {
    return beyond("z_mm", Number(values["z_mm"]), "the position is");
  }
  return null;
}

// Rows are used beyond these, and said so: what a source of light from near ultraviolet to mid infrared can mean.
const USUAL_NM = [350, 5000] as const;
const USUAL_C = [-60, 300] as const;
/** A cut-back length beyond the design by more than this is more likely another unit than a generous dice, mm and ratio. */
const LENGTH_RATIO = 1.02;

interface Span {
  count: number;
  line: number;
  low: number;
  high: number;
}

/** Looks at the accepted rows of one file for what should be said about them. */
export class FileWatch {
  readonly #spans = new Map<string, Span>();
  readonly #windows = new Map<string, { from: number; to: number; line: number }[]>();

  constructor(readonly kind: ReadingKind, readonly file: string, readonly remarks: Remarks) {}

  see(values: Values, owner: Owner | null, line: number): void {
    const wavelength = values["wavelength_nm"];
    if (typeof wavelength === "number" && outside(wavelength, USUAL_NM)) {
      this.#note("unusual_wavelength", wavelength, line);
    }
    const temperature = values["temperature_c"];
    if (typeof temperature === "number" && outside(temperature, USUAL_C)) {
      this.#note("unusual_temperature", temperature, line);
    }
    for (const name in values) {
      if (name.startsWith("u_") && values[name] === 0) this.#note("zero_uncertainty", 0, line);
    }
    if (owner === null) return;
    if (this.kind === "cutback") {
      const length = Number(values["length_mm"]);
      if (length > LENGTH_RATIO * owner.length_mm) this.#note("length_beyond_design", length, line);
    } else if (this.kind === "poling") {
      const from = Number(values["window_start_mm"]);
      const list = this.#windows.get(owner.unit) ?? [];
      list.push({ from, to: from + Number(values["window_length_mm"]), line });
      this.#windows.set(owner.unit, list);
    }
  }

  finish(): void {
    for (const [code, span] of this.#spans) {
      const range = span.low === span.high ? `${span.low}` : `${span.low}…${span.high}`;
      const n = span.count === 1 ? "1 row" : `${span.count} rows`;
      this.remarks.add(code, this.file, STATEMENTS[code]!(n, range), span.line);
    }
    for (const [unit, windows] of this.#windows) this.#overlaps(unit, windows);
  }

  /** The same window twice is a repeat; windows that share a part only count it twice. */
  #overlaps(unit: string, windows: { from: number; to: number; line: number }[]): void {
    windows.sort((a, b) => a.from - b.from || a.to - b.to);
    for (let i = 1; i < windows.length; i++) {
      const [a, b] = [windows[i - 1]!, windows[i]!];
      const same = Math.abs(a.from - b.from) <= SLACK_MM && Math.abs(a.to - b.to) <= SLACK_MM;
      if (same || b.from >= a.to - SLACK_MM) continue;
      const span = (w: typeof a) => `${short(w.from)}…${short(w.to)} mm (line ${w.line})`;
      this.remarks.add(
        "overlapping_windows",
        this.file,
        `poling windows of ${unit} overlap: ${span(a)} and ${span(b)}; both are used`,
        Math.max(a.line, b.line),
      );
      return; // one pair tells it
    }
  }

  #note(code: string, value: number, line: number): void {
    const span = this.#spans.get(code);
    if (span === undefined) this.#spans.set(code, { count: 1, line, low: value, high: value });
    else {
      span.count++;
      span.low = Math.min(span.low, value);
      span.high = Math.max(span.high, value);
    }
  }
}

const STATEMENTS: Readonly<Record<string, (rows: string, range: string) => string>> = {
  unusual_wavelength: (rows, range) =>
    `${rows} at an unusual wavelength (${range} nm; usual: ${USUAL_NM.join("…")} nm); used as given`,
  unusual_temperature: (rows, range) =>
    `${rows} at an unusual temperature (${range} °C; usual: ${
      USUAL_C.join("…")
    } °C); used as given: are they kelvin?`,
  zero_uncertainty: (rows) =>
    `${rows} with an uncertainty of 0, which means exact; leave it empty if it is not known`,
  length_beyond_design: (rows, range) =>
    `${rows} with a length (${range} mm) beyond the guide as designed; used as given: is the unit right?`,
};

const outside = (x: number, [low, high]: readonly [number, number]): boolean => x < low || x > high;
const short = (x: number): number => Number(x.toPrecision(9));
