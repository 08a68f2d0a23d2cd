import { z } from "zod";
import { LedgerError } from "../../shared/errors.ts";
import { sha256 } from "./disk.ts";
import type { Manifest } from "./types.ts";

const count = z.int().nonnegative();
const hash = z.string().regex(/^[0-9a-f]{64}$/);
const runName = z.string().regex(/^\d{6,}-[a-z][a-z0-9-]*-[0-9a-f]{8}$/);

const runInput = z.strictObject({
  name: z.string().min(1),
  kind: z.string().optional(),
  sha256: hash,
  bytes: count.optional(),
  rows: count,
  accepted: count,
  quarantined: count,
}).refine((input) => input.accepted + input.quarantined === input.rows, {
  error: "accepted + quarantined must be rows",
});

const manifestSchema = z.strictObject({
  format: z.literal(1),
  run: runName,
  sequence: z.int().positive(),
  kind: z.string().regex(/^[a-z][a-z0-9-]*$/),
  lot: z.string().min(1).optional(),
  created: z.iso.datetime(),
  program: z.string().min(1),
  model: z.string(),
  parameters: z.json(),
  fingerprint: z.string().optional(),
  parents: z.array(runName),
  inputs: z.array(runInput),
  tables: z.record(
    z.string().regex(/^[a-z][a-z0-9_]*$/),
    z.strictObject({
      file: z.string().regex(/^[a-z][a-z0-9_]*\.parquet$/),
      rows: count,
      bytes: count,
      sha256: hash,
    }),
  ),
});

/** Everything of a manifest but its name, which follows from the rest. */
export type NamelessManifest = Omit<Manifest, "run">;

/**
 * Gives a run its name, `<sequence>-<kind>-<short hash>`. The hash covers all of the manifest, hence the hashes of
 * inputs and tables and the parents' names: no part of the ledger can change without a name that no longer fits.
 * @throws TypeError for parts that do not hold
 */
export function nameManifest(parts: NamelessManifest): Manifest {
  // Through JSON once: what is hashed is what the reader will get back (undefined, NaN, dates …).
  const plain = JSON.parse(JSON.stringify(parts));
  const parsed = manifestSchema.safeParse({ ...plain, run: runNameOf(plain) });
  if (!parsed.success) throw new TypeError(`Cannot write a manifest: ${issuesText(parsed.error)}`);
  return parsed.data as Manifest;
}

/** The bytes of `manifest.json`. */
export const encodeManifest = (manifest: Manifest): Uint8Array =>
  new TextEncoder().encode(JSON.stringify(manifest, null, 2) + "\n");

/** Reads `manifest.json` found in the folder `run`. @throws LedgerError naming the file and what is wrong with it */
export function decodeManifest(bytes: Uint8Array, run: string, file: string): Manifest {
  const broken = (what: string, cause?: unknown) =>
    new LedgerError(`Cannot use ${file}: ${what}`, { file }, { cause });
  let plain: unknown;
  try {
    plain = JSON.parse(new TextDecoder("utf-8", { fatal: true }).decode(bytes));
  } catch (error) {
    throw broken(`it is not JSON (${(error as Error).message})`, error);
  }
  const parsed = manifestSchema.safeParse(plain);
  if (!parsed.success) throw broken(issuesText(parsed.error));
  const manifest = parsed.data as Manifest;
  if (manifest.run !== run) throw broken(`it says run "${manifest.run}", the folder is "${run}"`);
  const { run: _, ...parts } = manifest;
  const expected = runNameOf(parts);
  if (expected !== run) {
    throw broken(`its content hashes to "${expected}", the folder is "${run}"; it was changed`);
  }
  return manifest;
}

function runNameOf(parts: Pick<Manifest, "sequence" | "kind">): string {
  const number = String(parts.sequence).padStart(6, "0");
  return `${number}-${parts.kind}-${sha256(canonicalJson(parts)).slice(0, 8)}`;
}

/** JSON with the keys of every object in text order: the same content always gives the same text. */
export function canonicalJson(value: unknown): string {
  return JSON.stringify(
    value,
    (_, inner) =>
      inner !== null && typeof inner === "object" && !Array.isArray(inner)
        ? Object.fromEntries(Object.entries(inner).sort(([a], [b]) => a < b ? -1 : 1))
        : inner,
  );
}

const issuesText = (error: z.ZodError): string =>
  error.issues.map((issue) => `${issue.path.join(".") || "top level"}: ${issue.message}`).join("; ");
