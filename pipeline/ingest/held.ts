import { InputError } from "../../shared/errors.ts";
import type { ActiveFile, Ledger, Manifest } from "../ledger/types.ts";
import type { Covered } from "./coverage.ts";
import type { FileCounts } from "./file_run.ts";

/** What the ledger holds of a lot before a folder is taken in. */
export interface Held {
  readonly files: ReadonlyMap<string, ActiveFile>;
  readonly runs: readonly Manifest[];
}

export async function heldOf(ledger: Ledger, lot: string): Promise<Held> {
  const files = await ledger.activeFiles(lot);
  return { files: new Map(files.map((file) => [file.name, file])), runs: await ledger.runs() };
}

/** Counts of all files in force, in order of name, as their runs' manifests state them. */
export function heldCounts(held: Held): FileCounts[] {
  const key = (run: string, name: string) => `${run}\n${name}`;
  const inputs = new Map(
    held.runs.flatMap((run) => run.inputs.map((i) => [key(run.run, i.name), i] as const)),
  );
  return [...held.files.values()].map(({ lot, name, kind, sha256, run }) => {
    const { rows, accepted, quarantined } = inputs.get(key(run, name))!;
    return { lot, name, kind: kind as FileCounts["kind"], sha256, rows, accepted, quarantined };
  });
}

/** What the files in force cover, without those named in `except`. */
export async function heldCoverage(
  ledger: Ledger,
  lot: string,
  except: ReadonlySet<string>,
): Promise<Covered[]> {
  const covered: Covered[] = [];
  const columns = ["file_name", "kind", "scope", "unit"];
  for (const { table } of await ledger.readActive("coverage", lot, { columns })) {
    const [name, kind, scope, unit] = columns.map((column) => table.getChild(column)!);
    for (let i = 0; i < table.numRows; i++) {
      if (except.has(name!.get(i))) continue;
      covered.push({ kind: kind!.get(i), scope: scope!.get(i), unit: unit!.get(i) });
    }
  }
  return covered;
}

/** A wafer id names one wafer in the whole ledger. @throws InputError naming the lot that has it already */
export async function refuseForeignWafers(
  ledger: Ledger,
  lot: string,
  wafers: readonly string[],
): Promise<void> {
  const others = new Set(
    (await ledger.activeFiles()).map((file) => file.lot).filter((other) => other !== lot),
  );
  for (const other of others) {
    for (const { table } of await ledger.readActive("wafers", other, { columns: ["wafer"] })) {
      const theirs = table.getChild("wafer")!;
      const twice = wafers.find((wafer) => [...theirs].includes(wafer));
      if (twice === undefined) continue;
      throw new InputError(
        `Cannot take in lot ${lot}: its wafer "${twice}" is in the ledger already, as a wafer of lot ${other}; need ids that no two lots share`,
        { file: "lot.json", value: twice },
      );
    }
  }
}
