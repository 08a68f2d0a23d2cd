import { InputError } from "../../shared/errors.ts";
import { dieId, waferOf } from "../../shared/ids.ts";
import { type Lot, lotSchema } from "../../shared/schemas/lot.ts";
import { didYouMean } from "../../shared/schemas/nearest.ts";
import { parseJson } from "../json_file.ts";
import { sha256 } from "../ledger/disk.ts";
import type { TakenFile } from "./file_run.ts";
import type { KnownIds } from "./known_ids.ts";
import type { RunTables } from "./run_tables.ts";

const LARGEST_BYTES = 64e6;

/** Reads and checks lot.json. @throws InputError naming the field, what was found and what is near */
export async function readLot(path: string): Promise<{ lot: Lot; sha256: string }> {
  const fail = (why: string, cause?: unknown): never => {
    throw new InputError(`Cannot read lot record ${path}: ${why}`, { file: path }, { cause });
  };
  const bytes = await Deno.stat(path).then(({ size }) =>
    size > LARGEST_BYTES ? fail(`it has ${size} bytes, need at most ${LARGEST_BYTES}`) : Deno.readFile(path)
  ).catch((cause) => cause instanceof InputError ? Promise.reject(cause) : fail(cause.message, cause));
  let text: string;
  try {
    text = new TextDecoder("utf-8", { fatal: true }).decode(bytes);
  } catch (cause) {
    return fail("it is not UTF-8 text; save it as UTF-8", cause);
  }
  return { lot: parseJson(text, path, lotSchema, "lot record"), sha256: sha256(bytes) };
}

/** Dies that lot.json speaks of have to be in guides.csv. @throws InputError naming all that are not */
export function refuseUnknownDies(lot: Lot, known: KnownIds): void {
  const named = [
    ...lot.coatings.flatMap((c, i) => c.dies.map((die, k) => [`coatings[${i}].dies[${k}]`, die] as const)),
    ...lot.unavailable.map((u, i) => [`unavailable[${i}].die`, u.die] as const),
  ];
  const wrong = named.flatMap(([field, die]) => {
    const { known: there, nearest } = known.hasDie(die);
    return there ? [] : [`${field}: guides.csv has no die ${JSON.stringify(die)}${didYouMean(nearest)}`];
  });
  if (wrong.length === 0) return;
  const more = wrong.length > 20 ? `\n  and ${wrong.length - 20} more` : "";
  throw new InputError(`Cannot use lot record lot.json:\n  ${wrong.slice(0, 20).join("\n  ")}${more}`, {
    file: "lot.json",
  });
}

/** Writes the tables that lot.json fills. Its rows have no line of their own: 1 stands for the file. */
export function writeLot(lot: Lot, file: Pick<TakenFile, "name" | "sha256">, tables: RunTables): void {
  const origin = [lot.lot, file.name, file.sha256, 1];
  for (const table of ["lots", "wafers", "steps", "coatings", "unavailable"]) tables.declare(table);
  tables.append("lots", [...origin, lot.platform, lot.started ?? null]);
  for (const w of lot.wafers) {
    tables.append("wafers", [...origin, w.wafer, w.diameter_mm ?? null, w.substrate_batch ?? null]);
  }
  for (const s of lot.steps) {
    tables.append("steps", [
      ...origin,
      s.wafer,
      s.order,
      s.step,
      s.tool ?? null,
      s.recipe ?? null,
      s.finished ?? null,
      JSON.stringify(s.settings),
    ]);
  }
  lot.coatings.forEach((c, order) => {
    for (const die of c.dies) {
      tables.append("coatings", [...origin, order, c.coating_run, c.facet, waferOf(die), die]);
    }
  });
  for (const u of lot.unavailable) {
    const wafer = waferOf(u.die);
    tables.append("unavailable", [...origin, wafer, dieId(wafer, u.die.slice(wafer.length + 1)), u.reason]);
  }
}
