import { textTable } from "../console/mod.ts";
import { canonicalProcess } from "../../models/guides/mod.ts";
import { InputError } from "../../shared/errors.ts";
import { nm } from "../../shared/units.ts";
import type { Polarisation, Process, ThreeWaves } from "../../shared/vocabulary.ts";
import {
  askedBy,
  type AskedDesign,
  changedModels,
  designsFor,
  sensitivityOf,
  type SensitivityQuestion,
  widthScans,
} from "../designs/mod.ts";
import { type Ledger, openLedger } from "../ledger/mod.ts";
import { OutOfDate } from "../out_of_date.ts";
import { buildModel, loadPlatform, platformIds } from "../platforms.ts";
import { checkRange } from "../predict/request_range.ts";
import { loadDesign, lotsOf } from "../records.ts";
import { findRequest, type LoadedRequest } from "../requests.ts";
import { type CommonOptions, print, printJson, threadsOf } from "./common.ts";
import { solvingProgress } from "./predictions.ts";
import { csvDesigns } from "./sensitivity_csv.ts";
import { sensitivityText } from "./sensitivity_text.ts";

export interface SensitivityCommandOptions extends CommonOptions {
  readonly process?: string;
  readonly wavelength?: string;
  readonly width?: number;
  readonly temperature?: number;
  readonly lot?: string;
}

/** What is asked, with where it came from. */
interface Asked {
  readonly lot: string | null;
  readonly platform: string;
  readonly request: LoadedRequest | null;
  readonly waves: ThreeWaves;
  readonly process: Process;
  readonly oven: readonly [number, number];
  readonly designs: readonly AskedDesign[];
}

/** Poled length that a purity of a design without a lot would need; such a design has no request either. */
const NO_LENGTH_MM = 10;
const ROOM_C = 25;

/** What 0.1 µm, 1 nm and 1 °C do to the designs of a lot or platform. */
export async function sensitivityCommand(subject: string, options: SensitivityCommandOptions): Promise<0> {
  const answer = await withLedger(options, async (ledger) => {
    const asked = await whatIsAsked(subject, options, ledger);
    const loaded = await loadPlatform(asked.platform, options.platforms);
    if (asked.request !== null) checkRange(asked.request, loaded);
    const widths = asked.designs.flatMap((d) => d.width_um ?? []);
    const of = asked.lot ?? asked.platform;
    const solving = (what: string) => solvingProgress(what, ledger !== null);
    const { designs } = await designsFor(
      ledger,
      loaded,
      widths,
      [asked.request === null ? { waves: asked.waves } : askedBy(asked.request)],
      {
        workers: threadsOf(options),
        onSolving: solvingProgress(asked.lot ?? asked.platform, ledger !== null),
      },
    );
    const setting = { workers: threadsOf(options), onSolving: solving(`the slightly changed ${of}`) };
    const changed = await changedModels(ledger, loaded, widths, asked.waves, setting);
    const scans = await widthScans(ledger, loaded, widths, asked.waves, {
      ...setting,
      onSolving: solving(`the wider and narrower ${of}`),
    });
    const question: SensitivityQuestion = {
      model: buildModel({ ...loaded, designs }),
      platform: loaded.platform,
      designs,
      changed,
      widths: scans,
      waves: asked.waves,
      process: asked.process,
      oven: asked.oven,
      request: asked.request,
    };
    return {
      asked,
      platform: loaded.platform,
      designs: asked.designs.map((d) => sensitivityOf(question, d)),
    };
  });
  const { asked, designs } = answer;
  if (options.format === "json") {
    printJson({
      platform: asked.platform,
      lot: asked.lot,
      request: asked.request?.name ?? null,
      process: processText(asked.waves),
      designs,
    });
  } else if (options.format === "csv") print(csvDesigns(designs));
  else {print(sensitivityText(answer.platform, asked, designs, (columns, rows) =>
      textTable(columns, rows, { width: 80 })));}
  return 0;
}

/** The ledger as far as it is there: for reading where all is held in it, for writing where something has to be solved. */
async function withLedger<T>(options: CommonOptions, use: (ledger: Ledger | null) => Promise<T>): Promise<T> {
  try {
    await Deno.stat(options.ledger);
  } catch (error) {
    if (error instanceof Deno.errors.NotFound) return await use(null);
    throw error;
  }
  try {
    await using ledger = await openLedger(options.ledger, { write: false });
    return await use(ledger);
  } catch (error) {
    if (!(error instanceof OutOfDate)) throw error;
  }
  await using ledger = await openLedger(options.ledger, { write: true });
  return await use(ledger);
}

async function whatIsAsked(
  subject: string,
  options: SensitivityCommandOptions,
  ledger: Ledger | null,
): Promise<Asked> {
  if (options.lot !== undefined) {
    const request = await findRequest(subject, options.requests);
    for (const name of ["process", "wavelength", "temperature"] as const) {
      if (options[name] === undefined) continue;
      throw new InputError(`Cannot use --${name} beside a request: ${request.name} states it`, {
        column: name,
      });
    }
    const { platform, designs } = await lotDesigns(ledger, options.lot, options);
    const { waves, request: { process, oven_c: oven } } = request;
    return { lot: options.lot, platform, request, waves, process, oven, designs };
  }
  const lots = ledger === null ? [] : await lotsOf(ledger);
  const ids = await platformIds(options.platforms);
  if (!lots.includes(subject) && !ids.includes(subject)) await unknownSubject(subject, ids, lots, options);
  const waves = wavesOf(options);
  const process = Math.abs(waves.lambdaS / waves.lambdaI - 1) < 1e-9 ? "second-harmonic" : "sum-frequency";
  const temperature = options.temperature ?? ROOM_C;
  const common = { request: null, waves, process, oven: [temperature, temperature] } as const;
  if (lots.includes(subject)) {
    const { platform, designs } = await lotDesigns(ledger, subject, options);
    // No request, no oven: the period that would match at the temperature stands in for those on the mask.
    return { ...common, lot: subject, platform, designs: designs.map((d) => ({ ...d, periods_um: [] })) };
  }
  const { platform } = await loadPlatform(subject, options.platforms);
  if (platform.index.from !== "bulk" && options.width === undefined) {
    throw new InputError(
      `Cannot tell a guide's sensitivities on ${subject} without its width: add --width, in µm`,
      { column: "width" },
    );
  }
  return {
    ...common,
    lot: null,
    platform: subject,
    designs: [{ width_um: options.width ?? null, periods_um: [], poled_length_mm: NO_LENGTH_MM }],
  };
}

/** Neither a platform nor a lot: perhaps a request, which has designs only beside a lot. @throws InputError */
async function unknownSubject(
  subject: string,
  platforms: readonly string[],
  lots: readonly string[],
  { requests }: SensitivityCommandOptions,
): Promise<never> {
  const have = lots.length === 0 ? "the ledger holds no lot" : `lots are ${lots.join(", ")}`;
  const request = await findRequest(subject, requests).catch(() => null);
  throw new InputError(
    request === null
      ? `Unknown platform or lot ${JSON.stringify(subject)}: platforms are ${platforms.join(", ")}; ${have}`
      : `Cannot tell what request ${request.name} is asked about: add --lot; ${have}`,
    { value: subject },
  );
}

/** The designs of a lot: one per drawn width, with every period that it is drawn with. */
async function lotDesigns(
  ledger: Ledger | null,
  lot: string,
  { width, ledger: folder }: SensitivityCommandOptions,
): Promise<{ platform: string; designs: AskedDesign[] }> {
  if (ledger === null) {
    throw new InputError(`Cannot look up lot ${lot}: there is no ledger ${folder}`, { file: folder });
  }
  const { lot: record, guides } = await loadDesign(ledger, lot);
  const widths = [...new Set(guides.map((g) => g.width_um))].sort((a, b) => a - b);
  if (width !== undefined && !widths.includes(width)) {
    throw new InputError(`Cannot find width ${width} µm in lot ${lot}: it has ${widths.join(", ")} µm`, {
      column: "width",
      value: String(width),
    });
  }
  return {
    platform: record.platform,
    designs: (width === undefined ? widths : [width]).map((width_um) => {
      const own = guides.filter((g) => g.width_um === width_um);
      return {
        width_um,
        periods_um: [...new Set(own.map((g) => g.period_um))],
        poled_length_mm: own[0]!.poled_length_mm,
      };
    }),
  };
}

function wavesOf({ process, wavelength }: SensitivityCommandOptions): ThreeWaves {
  if (process === undefined || wavelength === undefined) {
    throw new InputError(
      "Cannot tell sensitivities without a process: add --process and --wavelength, or ask with a request's name and --lot",
      { column: process === undefined ? "process" : "wavelength" },
    );
  }
  try {
    canonicalProcess(process);
  } catch (cause) {
    throw new InputError((cause as Error).message, { column: "process", value: process }, { cause });
  }
  const [polP, polS, polI] = process.split(/[>+]/) as [Polarisation, Polarisation, Polarisation];
  const parts = wavelength.split(",").map((text) => text.trim() === "" ? NaN : Number(text));
  if (parts.length > 2 || !parts.every((x) => x > 0 && x < Infinity)) {
    throw new InputError(
      `Cannot use --wavelength ${
        JSON.stringify(wavelength)
      }: need the signal's in nm, and with a comma the idler's`,
      { column: "wavelength", value: wavelength },
    );
  }
  const [lambdaS, lambdaI] = [nm(parts[0]!), nm(parts[1] ?? parts[0]!)];
  return { lambdaP: 1 / (1 / lambdaS + 1 / lambdaI), lambdaS, lambdaI, polP, polS, polI };
}

const processText = ({ polP, polS, polI }: ThreeWaves): string => `${polP}>${polS}+${polI}`;
