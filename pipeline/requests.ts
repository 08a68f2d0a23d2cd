import { dirname, join } from "node:path";
import { fileURLToPath } from "node:url";
import { parse } from "csv-parse/sync";
import { type CheckedRequest, checkRequest, requestSchema } from "../shared/schemas/request.ts";
import { InputError } from "../shared/errors.ts";
import { fingerprintOf, parseJson, readTextFile, sha256 } from "./json_file.ts";

/** A sampled pump spectrum: vacuum wavelength in m, intensity per wavelength on a free scale. */
export interface PumpSpectrum {
  readonly lambda: Float64Array;
  readonly intensity: Float64Array;
}

/** A request as read, with its pump spectrum if it names one and a fingerprint of every byte that it was made from. */
export interface LoadedRequest extends CheckedRequest {
  readonly name: string;
  readonly file: string;
  readonly fingerprint: string;
  readonly spectrum: PumpSpectrum | null;
  /** What was read and is not used, for people. */
  readonly remarks: readonly string[];
}

const EXAMPLES = fileURLToPath(new URL("../fixtures/requests/", import.meta.url));

/** Reads one request file and everything it names. @throws InputError naming the field and the reason */
export async function loadRequestFile(path: string): Promise<LoadedRequest> {
  const text = await readTextFile(path, "request");
  const request = parseJson(text, path, requestSchema, "request");
  const checked = checkRequest(request);
  if ("problems" in checked) {
    const lines = checked.problems.map((p) => `${p.field}: ${p.reason}`);
    throw new InputError(`Cannot use request ${path}:\n  ${lines.join("\n  ")}`, {
      file: path,
      column: checked.problems[0]!.field,
    });
  }
  const hashes = [sha256(text)];
  let spectrum: PumpSpectrum | null = null;
  if (request.pump?.spectrum !== undefined) {
    const file = join(dirname(path), request.pump.spectrum);
    const spectrumText = await readTextFile(file, "pump spectrum");
    spectrum = parseSpectrum(spectrumText, file);
    hashes.push(sha256(spectrumText));
    requirePumpWithin(spectrum, checked.waves.lambdaP, file);
  }
  return {
    ...checked,
    name: request.request,
    file: path,
    fingerprint: fingerprintOf(hashes),
    spectrum,
    remarks: ignoredFields(checked, path),
  };
}

/** Pulse data of a pump without a pulse length: it counts as continuous, and what belongs to pulses is not used. */
function ignoredFields({ request, pulsed }: CheckedRequest, path: string): string[] {
  if (request.process !== "pair-generation" || pulsed) return [];
  const given = (["repetition_mhz", "shape"] as const).filter((field) => request.pump?.[field] !== undefined);
  return given.map((field) =>
    `${path}: pump.${field} is not used: without fwhm_ps or fwhm_nm the pump is a continuous wave`
  );
}

/** The folders in which requests are looked for, in order; `--requests DIR` replaces `./requests`. */
export function requestFolders(folder?: string): string[] {
  return [folder ?? "requests", EXAMPLES];
}

/** Every request file of a folder, sorted by name. @throws InputError for a bad file or two files with one request name */
export async function loadRequests(folder: string): Promise<LoadedRequest[]> {
  const files: string[] = [];
  try {
    for await (const entry of Deno.readDir(folder)) {
      if (entry.isFile && entry.name.endsWith(".json")) files.push(join(folder, entry.name));
    }
  } catch (cause) {
    throw new InputError(`Cannot read the request folder ${folder}: ${(cause as Error).message}`, {
      file: folder,
    }, { cause });
  }
  const loaded = await Promise.all(files.sort().map(loadRequestFile));
  const seen = new Map<string, string>();
  for (const { name, file } of loaded) {
    const other = seen.get(name);
    if (other !== undefined) {
      throw new InputError(`Cannot use two requests called ${name}: ${other} and ${file}`, { file });
    }
    seen.set(name, file);
  }
  return loaded;
}

/** The requests of `--requests DIR`, else of `./requests`, else the examples. */
export async function loadAllRequests(folder?: string): Promise<LoadedRequest[]> {
  if (folder !== undefined) return await loadRequests(folder);
  for (const candidate of requestFolders()) {
    if (await isFolder(candidate)) return await loadRequests(candidate);
  }
  throw new InputError(
    "Cannot find any request: there is no ./requests folder; name one with --requests DIR",
  );
}

/** A request by name or by path of its file. */
export async function findRequest(nameOrPath: string, folder?: string): Promise<LoadedRequest> {
  if (nameOrPath.endsWith(".json") || nameOrPath.includes("/")) return await loadRequestFile(nameOrPath);
  const seen: string[] = [];
  for (const candidate of requestFolders(folder)) {
    if (!await isFolder(candidate)) {
      if (folder === candidate) {
        throw new InputError(`Cannot read the request folder ${candidate}`, { file: candidate });
      }
      continue;
    }
    for (const request of await loadRequests(candidate)) {
      if (request.name === nameOrPath) return request;
      seen.push(request.name);
    }
  }
  throw new InputError(
    `Unknown request ${JSON.stringify(nameOrPath)}: known are ${
      seen.length === 0 ? "none" : seen.join(", ")
    }; or give the path of a .json file`,
    { value: nameOrPath },
  );
}

async function isFolder(path: string): Promise<boolean> {
  try {
    return (await Deno.stat(path)).isDirectory;
  } catch (error) {
    if (error instanceof Deno.errors.NotFound) return false;
    throw error;
  }
}

/** A spectrum of another laser, or in another unit, would leave no pump light at all and every figure of pairs empty. */
function requirePumpWithin({ lambda }: PumpSpectrum, lambdaP: number, file: string): void {
  const [first, last] = [lambda[0]!, lambda[lambda.length - 1]!];
  if (lambdaP >= first && lambdaP <= last) return;
  const text = (l: number) => Number((l * 1e9).toPrecision(7));
  throw new InputError(
    `Cannot use pump spectrum ${file}: it reaches from ${text(first)} to ${text(last)} nm, ` +
      `need the request's pump wavelength ${text(lambdaP)} nm inside`,
    { file, column: "wavelength_nm" },
  );
}

function parseSpectrum(text: string, file: string): PumpSpectrum {
  let records: { record: Record<string, string>; info: { lines: number } }[];
  try {
    records = parse(text, { columns: true, bom: true, info: true, skip_empty_lines: true, trim: true });
  } catch (cause) {
    throw new InputError(`Cannot read pump spectrum ${file}: ${(cause as Error).message}`, { file }, {
      cause,
    });
  }
  const rows = records.map(({ record, info }) => {
    const row = { lambda: NaN, intensity: NaN };
    for (const [column, key] of [["wavelength_nm", "lambda"], ["intensity", "intensity"]] as const) {
      const cell = record[column];
      const value = cell === undefined || cell === "" ? NaN : Number(cell);
      if (!Number.isFinite(value) || (column === "wavelength_nm" && value <= 0)) {
        throw new InputError(
          `Cannot use pump spectrum ${file}:${info.lines}, column "${column}": found ${
            JSON.stringify(cell ?? "")
          }, need a finite number`,
          { file, line: info.lines, column, value: cell ?? "" },
        );
      }
      row[key] = value;
    }
    return row;
  }).sort((a, b) => a.lambda - b.lambda);
  const twice = rows.find((r, k) => k > 0 && r.lambda === rows[k - 1]!.lambda);
  if (twice !== undefined) {
    throw new InputError(
      `Cannot use pump spectrum ${file}: ${twice.lambda} nm stands there twice, need one intensity each`,
      { file, column: "wavelength_nm", value: String(twice.lambda) },
    );
  }
  if (rows.length < 3 || !rows.some((r) => r.intensity > 0)) {
    throw new InputError(`Cannot use pump spectrum ${file}: need at least 3 rows with intensity above 0`, {
      file,
    });
  }
  return {
    lambda: Float64Array.from(rows, (r) => r.lambda * 1e-9),
    // Noise below the detector's zero is no light.
    intensity: Float64Array.from(rows, (r) => Math.max(0, r.intensity)),
  };
}
