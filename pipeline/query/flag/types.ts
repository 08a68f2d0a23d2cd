import type { ReadingRef } from "../../traits/trait_row.ts";
import type { Severity } from "./rules.ts";

export type { Severity } from "./rules.ts";

/** Something of a unit's history that is over-represented among what is affected. */
export interface FlagSuspect {
  readonly kind: "step" | "substrate_batch" | "coating_run" | "group";
  /** For kind `step`: which, on what tool, by what recipe; null where it does not apply or does not differ. */
  readonly step: string | null;
  readonly tool: string | null;
  readonly recipe: string | null;
  /** Batch, coating run with its facet (`C203|out`) or mask group; null for a step. */
  readonly name: string | null;
  /** One-sided, comparing what carried it as wholes (wafers, dies), corrected for all that was tried. */
  readonly p_value: number;
  readonly p_value_uncorrected: number;
  /** Fisher's exact test, one-sided, with every die as evidence of its own: too small where dies share their wafer's fate. */
  readonly p_value_dies: number;
  readonly affected_with: number;
  readonly affected: number;
  readonly unaffected_with: number;
  readonly unaffected: number;
  /** What was compared, in words: "1 of 2 wafers". */
  readonly compared: string;
  /** `no_power`: no outcome of this design could have shown it. `measured`: a reading of the thing itself shows it. */
  readonly verdict: "suspect" | "not_shown" | "no_power" | "measured";
  /** Nothing else on record was carried by all that are affected and by nothing else. */
  readonly only_difference: boolean;
  /** Others that the very same units carried: these data can't tell them apart. */
  readonly same_as: readonly string[];
}

export interface FlagEvidence {
  readonly numbers: Readonly<Record<string, number | string | null>>;
  readonly readings: readonly ReadingRef[];
  readonly dies?: readonly string[];
  readonly guides?: readonly string[];
}

export interface Flag {
  readonly scope: "lot" | "wafer" | "coating_run";
  readonly id: string;
  readonly lot: string;
  readonly rule: string;
  readonly severity: Severity;
  /** The finding in a few words, for a list under the id. */
  readonly brief: string;
  readonly statement: string;
  readonly evidence: FlagEvidence;
  readonly suspects: readonly FlagSuspect[];
}

export const SEVERITY_ORDER: Readonly<Record<Severity, number>> = { act: 0, watch: 1, note: 2 };

/** Joins references by file, so that a flag on hundreds of readings names each file once. */
export function mergeRefs(refs: readonly ReadingRef[]): ReadingRef[] {
  const byFile = new Map<string, { ref: ReadingRef; lines: [number, number][] }>();
  for (const ref of refs) {
    const key = `${ref.table}|${ref.file_name}|${ref.source_file}`;
    const held = byFile.get(key) ?? { ref, lines: [] };
    held.lines.push(...ref.lines.map(([a, b]): [number, number] => [a, b]));
    byFile.set(key, held);
  }
  return [...byFile.values()].map(({ ref, lines }) => ({ ...ref, lines: joined(lines) }));
}

function joined(lines: [number, number][]): [number, number][] {
  const out: [number, number][] = [];
  for (const [a, b] of lines.sort((x, y) => x[0] - y[0])) {
    const last = out.at(-1);
    if (last !== undefined && a <= last[1] + 1) last[1] = Math.max(last[1], b);
    else out.push([a, b]);
  }
  return out;
}

/** `readings/cutback.csv:34–36, 40`. */
export function refText({ file_name, lines }: ReadingRef, most = 6): string {
  // A JSON file is read as a whole: its rows have no lines of their own.
  if (file_name.endsWith(".json")) return file_name;
  const stretches = lines.slice(0, most).map(([a, b]) => a === b ? String(a) : `${a}–${b}`);
  const more = lines.length > most ? ` and ${lines.length - most} more stretches` : "";
  return `${file_name}:${stretches.join(", ")}${more}`;
}

/** A number as a sentence shows it: significant digits, no exponent for what people read as a plain number. */
export function num(x: number, digits = 3): string {
  if (!Number.isFinite(x)) return String(x);
  const text = String(Number(x.toPrecision(digits)));
  return text.replace("-", "−");
}
/** A share in percent; what would round to nothing beside a whole is told as 0. */
export const percent = (x: number): string => `${x < 5e-5 ? "0" : num(100 * x, x < 0.1 ? 2 : 3)} %`;
/** `p = 0.023`; what is smaller than one in ten thousand needs no digits. */
export const pText = (p: number): string => p < 1e-4 ? "p < 0.0001" : `p = ${num(p, 2)}`;
export const plural = (n: number, one: string, many = `${one}s`): string => `${n} ${n === 1 ? one : many}`;
