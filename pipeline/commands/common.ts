import { cpus } from "node:os";
import { type Format, jsonText } from "../console/mod.ts";

/** Options that commands share. */
export interface CommonOptions {
  readonly ledger: string;
  readonly platforms?: string;
  readonly requests?: string;
  readonly format: Format;
  readonly workers?: number;
}

const encoder = new TextEncoder();

/** Writes all of a text to standard output; a reader that has gone away ends it quietly. */
export function print(text: string): void {
  write(Deno.stdout, text.endsWith("\n") || text === "" ? text : `${text}\n`);
}

/** A remark or progress on standard error. */
export function note(text: string): void {
  write(Deno.stderr, `${text}\n`);
}

export const printJson = (value: unknown): void => print(jsonText(value));

function write(stream: { writeSync(bytes: Uint8Array): number }, text: string): void {
  const bytes = encoder.encode(text);
  try {
    for (let at = 0; at < bytes.length;) at += stream.writeSync(bytes.subarray(at));
  } catch (error) {
    if (!(error instanceof Deno.errors.BrokenPipe)) throw error;
  }
}

/** Threads to compute on: as asked, else all cores. */
export const threadsOf = ({ workers }: { readonly workers?: number }): number =>
  workers ?? Math.max(1, cpus().length);

/** The same sentence many times over is told once, with how often. */
export function noteAll(statements: readonly string[], most = 20): void {
  const counts = new Map<string, number>();
  for (const s of statements) counts.set(s, (counts.get(s) ?? 0) + 1);
  const lines = [...counts].map(([s, n]) => n === 1 ? s : `${s} (${n} times)`);
  lines.slice(0, most).forEach((line) => note(`remark: ${line}`));
  if (lines.length > most) {
    note(`remark: … and ${lines.length - most} more; they are in the ledger (sql "SELECT * FROM remarks")`);
  }
}
