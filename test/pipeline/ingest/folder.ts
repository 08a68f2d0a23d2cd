import { dirname, join } from "node:path";
import type { Table } from "apache-arrow";
import { ingestFolder, type IngestResult } from "../../../pipeline/ingest/mod.ts";
import { type Ledger, openLedger } from "../../../pipeline/ledger/mod.ts";

/** A row of a table as a plain object. */
export type Row = Record<string, unknown>;

export const LOT = {
  lot: "K07",
  platform: "bulk-ktp",
  started: "2026-09-14",
  wafers: [{ wafer: "K07-1", diameter_mm: 76.2 }],
};

export const GUIDES =
  "wafer,die,x_mm,y_mm,guide,group,width_um,period_um,length_mm,poled_from_mm,poled_length_mm\n" +
  ["05", "06"].flatMap((die) =>
    ["g01", "g02", "g12"].map((guide) => `K07-1,${die},1,2,${guide},A,7,9.1,20,1,18\n`)
  ).join("");

export const CUTBACK = "wafer,die,guide,wavelength_nm,polarisation,length_mm,insertion_loss_db\n";

/** A run folder and a ledger of its own, both gone after use. */
export class Scene implements AsyncDisposable {
  #ledger: Ledger | null = null;
  private constructor(readonly root: string) {}

  static async make(
    files: Readonly<Record<string, string | Uint8Array | object | null>> = {},
  ): Promise<Scene> {
    const scene = new Scene(await Deno.makeTempDir({ prefix: "ingest-" }));
    await Deno.mkdir(scene.folder);
    await scene.write({ "lot.json": LOT, "guides.csv": GUIDES, ...files });
    return scene;
  }

  get folder(): string {
    return join(this.root, "K07");
  }

  /** Writes files; objects become JSON, null takes a file away. */
  async write(files: Readonly<Record<string, string | Uint8Array | object | null>>): Promise<void> {
    for (const [name, content] of Object.entries(files)) {
      const path = join(this.folder, name);
      await Deno.mkdir(dirname(path), { recursive: true });
      if (content === null) await Deno.remove(path).catch(() => {});
      else if (typeof content === "string") await Deno.writeTextFile(path, content);
      else if (content instanceof Uint8Array) await Deno.writeFile(path, content);
      else await Deno.writeTextFile(path, JSON.stringify(content));
    }
  }

  async ledger(): Promise<Ledger> {
    return this.#ledger ??= await openLedger(join(this.root, "ledger"), { write: true });
  }

  async ingest(): Promise<IngestResult> {
    return await ingestFolder(this.folder, await this.ledger());
  }

  /** Rows of a table of one run, as stored. */
  async rows(run: string, table: string): Promise<Row[]> {
    return rowsOf(await (await this.ledger()).readTable(run, table));
  }

  /** Rows in force. */
  async active(table: string): Promise<Row[]> {
    return (await (await this.ledger()).readActive(table, "K07")).flatMap(({ table }) => rowsOf(table));
  }

  async [Symbol.asyncDispose](): Promise<void> {
    await this.#ledger?.close();
    await Deno.remove(this.root, { recursive: true });
  }
}

const rowsOf = (table: Table): Row[] => table.toArray().map((row) => ({ ...row.toJSON() }));

/** Takes in a folder with one file of readings. */
export async function ingestOne(
  name: string,
  content: string | Uint8Array,
  lot: object = {},
): Promise<{ result: IngestResult; rows: Row[]; quarantine: Row[]; counts: [number, number, number] }> {
  await using scene = await Scene.make({ [`readings/${name}`]: content, "lot.json": { ...LOT, ...lot } });
  const result = await scene.ingest();
  const table = name.split(/[-.]/, 1)[0]!;
  const file = result.files.find((f) => f.name === `readings/${name}`)!;
  return {
    result,
    rows: await scene.rows(result.run, table),
    quarantine: await scene.rows(result.run, "quarantine"),
    counts: [file.rows, file.accepted, file.quarantined],
  };
}
