import { createHash } from "node:crypto";
import type { z } from "zod";
import { InputError, quoteValue } from "../shared/errors.ts";

/** SHA-256 of bytes or text, lower-case hex. */
export function sha256(data: Uint8Array | string): string {
  return createHash("sha256").update(data).digest("hex");
}

/**
 * Fingerprint of what was made from some files: the file's own sha256 where there is one, so that it can be held against
 * the file; else that of the files' sha256s, one per line.
 */
export const fingerprintOf = (hashes: readonly string[]): string =>
  hashes.length === 1 ? hashes[0]! : sha256(hashes.join("\n"));

/** Reads a small text file; a missing or unreadable one is an {@link InputError} that names it. */
export async function readTextFile(path: string, what: string): Promise<string> {
  try {
    const bytes = await Deno.readFile(path);
    return new TextDecoder("utf-8", { fatal: true }).decode(bytes);
  } catch (cause) {
    if (cause instanceof Deno.errors.NotFound) {
      throw new InputError(`Cannot read ${what} ${path}: there is no such file`, { file: path }, { cause });
    }
    const reason = cause instanceof TypeError ? "it is not UTF-8 text" : (cause as Error).message;
    throw new InputError(`Cannot read ${what} ${path}: ${reason}`, { file: path }, { cause });
  }
}

/** Reads and checks a JSON file against a schema. @throws InputError naming file, field, value and what would be right */
export async function readJsonFile<S extends z.ZodType>(
  path: string,
  schema: S,
  what: string,
): Promise<z.infer<S>> {
  return parseJson(await readTextFile(path, what), path, schema, what);
}

/** Parses JSON text and checks it; `path` is for the messages. */
export function parseJson<S extends z.ZodType>(
  text: string,
  path: string,
  schema: S,
  what: string,
): z.infer<S> {
  let data: unknown;
  try {
    data = JSON.parse(text);
  } catch (cause) {
    const at = /position (\d+)/.exec((cause as Error).message);
    const line = at === null ? undefined : text.slice(0, Number(at[1])).split("\n").length;
    throw new InputError(
      `Cannot read ${what} ${path}${line === undefined ? "" : `:${line}`}: not valid JSON (${
        (cause as Error).message
      })`,
      { file: path, ...(line === undefined ? {} : { line }) },
      { cause },
    );
  }
  const checked = schema.safeParse(data, { reportInput: true });
  if (checked.success) return checked.data;
  const lines = checked.error.issues.flatMap((issue) => issueLines(issue));
  throw new InputError(`Cannot use ${what} ${path}:\n  ${lines.join("\n  ")}`, { file: path });
}

/** A zod issue as sentences that name the field, what was found and what is wanted. */
export function issueLines(issue: z.core.$ZodIssue, prefix: PropertyKey[] = []): string[] {
  const path = [...prefix, ...issue.path];
  if (issue.code === "invalid_union" && issue.errors.length > 0) {
    // The branch that got furthest is the one that was meant.
    const best = issue.errors.reduce((a, b) => deepest(b) > deepest(a) ? b : a);
    return best.flatMap((inner) => issueLines(inner, path));
  }
  // What a key should look like stands one level down.
  if (issue.code === "invalid_key") return issue.issues.flatMap((inner) => issueLines(inner, path));
  const input = issue.input;
  const found = input === undefined || (typeof input === "object" && input !== null)
    ? ""
    : ` (found ${quoteValue(input)})`;
  return [`${fieldName(path)}: ${issue.message}${found}`];
}

const deepest = (issues: readonly z.core.$ZodIssue[]): number =>
  Math.max(...issues.map((i) => i.path.length));

/** `["require", 0, "figure"]` → `require[0].figure`. */
export function fieldName(path: readonly PropertyKey[]): string {
  if (path.length === 0) return "the whole file";
  return path.map((p, k) => typeof p === "number" ? `[${p}]` : k === 0 ? String(p) : `.${String(p)}`).join(
    "",
  );
}
