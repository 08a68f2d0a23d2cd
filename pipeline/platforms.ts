import { basename, dirname, join } from "node:path";
import { fileURLToPath } from "node:url";
import { parse } from "csv-parse/sync";
import type { z } from "zod";
import { type PlatformModel, platformModel, processRemarks } from "../models/decision/mod.ts";
import {
  type AreaModel,
  bulkIndexModel,
  checkTableBounds,
  constantAreaModel,
  designsAreaModel,
  designsIndexModel,
  type IndexModel,
  solvedCoupling,
  type SolvedDesigns,
  SOLVER_VERSION,
  type SolverIndexModel,
  tableAreaModel,
  tableIndexModel,
} from "../models/guides/mod.ts";
import { areaRowSchema, indexRowSchema, type Platform, platformSchema } from "../shared/schemas/platform.ts";
import { InputError } from "../shared/errors.ts";
import { fingerprintOf, issueLines, parseJson, readTextFile, sha256 } from "./json_file.ts";

export type IndexRow = z.infer<typeof indexRowSchema>;
export type AreaRow = z.infer<typeof areaRowSchema>;

/** A platform with its tables and a fingerprint of every byte that it was made from. */
export interface LoadedPlatform {
  readonly platform: Platform;
  readonly indexRows: readonly IndexRow[] | null;
  readonly areaRows: readonly AreaRow[] | null;
  readonly file: string;
  readonly fingerprint: string;
}

const BUILT_IN = fileURLToPath(new URL("../models/platforms/", import.meta.url));

/** Ids of the platforms in a folder and built in, sorted. */
export async function platformIds(folder?: string): Promise<string[]> {
  const ids = new Set<string>();
  for (const dir of folder === undefined ? [BUILT_IN] : [folder, BUILT_IN]) {
    try {
      for await (const entry of Deno.readDir(dir)) {
        if (entry.name.endsWith(".json")) ids.add(entry.name.slice(0, -5));
      }
    } catch (cause) {
      throw new InputError(`Cannot read the platform folder ${dir}: ${(cause as Error).message}`, {
        file: dir,
      });
    }
  }
  return [...ids].sort();
}

/**
 * Loads a platform from the user's folder (first) or from those built in.
 * @throws InputError for an unknown id (names the known ones), a file that fails its schema, a bad table row
 */
export async function loadPlatform(id: string, folder?: string): Promise<LoadedPlatform> {
  const known = await platformIds(folder);
  if (!known.includes(id)) {
    throw new InputError(`Unknown platform ${JSON.stringify(id)}: known are ${known.join(", ")}`, {
      value: id,
    });
  }
  const own = folder === undefined ? null : join(folder, `${id}.json`);
  const file = own !== null && await exists(own) ? own : join(BUILT_IN, `${id}.json`);
  const text = await readTextFile(file, "platform");
  const platform = parseJson(text, file, platformSchema, "platform");
  if (platform.platform !== id) {
    throw new InputError(
      `Cannot use platform ${file}: it calls itself ${
        JSON.stringify(platform.platform)
      }, its file name says ${JSON.stringify(id)}`,
      { file, column: "platform", value: platform.platform },
    );
  }
  const hashes = [sha256(text)];
  let indexRows: IndexRow[] | null = null;
  let areaRows: AreaRow[] | null = null;
  if (platform.index.from === "table") {
    const index = await readTable(join(dirname(file), basename(platform.index.n_eff)), indexRowSchema);
    indexRows = index.rows;
    hashes.push(index.sha256);
    checkBounds(platform, index.rows, file);
    if (platform.index.effective_area !== undefined) {
      const area = await readTable(
        join(dirname(file), basename(platform.index.effective_area)),
        areaRowSchema,
      );
      areaRows = area.rows;
      hashes.push(area.sha256);
    }
  }
  if (platform.index.from === "solver") {
    hashes.push(sha256(`solver ${SOLVER_VERSION}`)); // what the file makes of it is part of what it says
    if (platform.effective_area_um2 !== undefined) {
      throw new InputError(
        `Cannot use platform ${file}: effective_area_um2 ${platform.effective_area_um2} beside index.from "solver", ` +
          `which solves the areas; leave one out`,
        { file, column: "effective_area_um2" },
      );
    }
  } else if (platform.effective_area_um2 === undefined && areaRows === null) {
    throw new InputError(
      `Cannot use platform ${file}: no effective area; give effective_area_um2 or index.effective_area`,
      { file, column: "effective_area_um2" },
    );
  }
  return { platform, indexRows, areaRows, file, fingerprint: fingerprintOf(hashes) };
}

/** A table is held against what its guides stand on before anything is computed with it. */
function checkBounds(
  { index, material, axes }: Pick<Platform, "index" | "material" | "axes">,
  rows: readonly IndexRow[],
  file: string,
): void {
  if (index.from !== "table") return;
  try {
    checkTableBounds(rows, material, axes, index.substrate ?? "unknown");
  } catch (cause) {
    if (!(cause instanceof RangeError)) throw cause;
    throw new InputError(`Cannot use platform ${file}: ${cause.message}`, { file, column: "n_eff" }, {
      cause,
    });
  }
}

/** What a model is built from: plain data, so that it can be handed to a worker. */
export type PlatformData =
  & Pick<LoadedPlatform, "platform" | "indexRows" | "areaRows" | "file">
  & {
    /** Solved designs, for a platform whose index is solved. */
    readonly designs?: SolvedDesigns | null;
  };

/** Builds the models of a platform. @throws InputError when its tables or axes can't make one */
export function buildModel(data: PlatformData): PlatformModel {
  const { platform, file } = data;
  try {
    const { index, area } = guideModels(data);
    const outputs = data.designs?.outputs ?? [];
    return platformModel(
      platform,
      index,
      area,
      (geometry, pol, lambda, fibreMfd) => solvedCoupling(outputs, geometry, pol, lambda, fibreMfd),
    );
  } catch (cause) {
    if (!(cause instanceof RangeError)) throw cause;
    throw new InputError(`Cannot use platform ${file}: ${cause.message}`, { file }, { cause });
  }
}

function guideModels(
  { platform, indexRows, areaRows, designs }: PlatformData,
): { index: IndexModel; area: AreaModel } {
  const { index, material, axes } = platform;
  const constant = platform.effective_area_um2;
  switch (index.from) {
    case "bulk":
      return { index: bulkIndexModel(material, axes), area: constantAreaModel(constant!) };
    case "table":
      return {
        index: tableIndexModel(indexRows!, material, axes, index.nominal),
        area: constant !== undefined ? constantAreaModel(constant) : tableAreaModel(areaRows!, index.nominal),
      };
    case "solver": {
      const solved = designs ?? { tables: [], areas: [], outputs: [] };
      return {
        index: withRemarks(designsIndexModel(solved), processRemarks(index)),
        area: designsAreaModel(solved),
      };
    }
  }
}

/** Remarks that hold of every answer of an index. */
function withRemarks(index: SolverIndexModel, always: readonly string[]): SolverIndexModel {
  if (always.length === 0) return index;
  return {
    ...index,
    remark: (...question) => [...always, index.remark(...question)].filter((r) => r !== null).join("\n"),
  };
}

async function exists(path: string): Promise<boolean> {
  try {
    await Deno.stat(path);
    return true;
  } catch (error) {
    if (error instanceof Deno.errors.NotFound) return false;
    throw error;
  }
}

/** A small CSV beside a platform file: every cell but the texts is a number. */
async function readTable<S extends z.ZodType>(
  path: string,
  schema: S,
): Promise<{ rows: z.infer<S>[]; sha256: string }> {
  const text = await readTextFile(path, "platform table");
  let records: { record: Record<string, string>; info: { lines: number } }[];
  try {
    records = parse(text, { columns: true, bom: true, info: true, skip_empty_lines: true, trim: true });
  } catch (cause) {
    throw new InputError(`Cannot read platform table ${path}: ${(cause as Error).message}`, { file: path }, {
      cause,
    });
  }
  const rows = records.map(({ record, info }) => {
    const cells = Object.entries(record).filter(([, v]) => v !== "").map(([k, v]) => {
      return [k, k === "polarisation" || k === "process" ? v : Number(v)] as const;
    });
    const checked = schema.safeParse(Object.fromEntries(cells), { reportInput: true });
    if (checked.success) return checked.data;
    const why = checked.error.issues.flatMap((issue) => issueLines(issue)).join("; ");
    throw new InputError(`Cannot use platform table ${path}:${info.lines}: ${why}`, {
      file: path,
      line: info.lines,
    });
  });
  return { rows, sha256: sha256(text) };
}
