import { platformDesign } from "../../models/decision/mod.ts";
import {
  type CutOff,
  type DesignAreas,
  type DesignOutput,
  designTable,
  type PolarisationTable,
  type SolvedDesigns,
  type SolverDesign,
  TABLE_GRID,
  type TableGrid,
} from "../../models/guides/mod.ts";
import { InputError } from "../../shared/errors.ts";
import { nm } from "../../shared/units.ts";
import type { Polarisation, ThreeWaves } from "../../shared/vocabulary.ts";
import type { Ledger } from "../ledger/mod.ts";
import type { LoadedPlatform } from "../platforms.ts";
import { piecesFor, type SolveSetting } from "./pieces.ts";
import type { DesignTask, TaskResult } from "./tasks.ts";

/** Wavelengths (m) at which a request needs areas and the number of modes; diameters (m) of its fibres, where known. */
export interface AskedWaves {
  readonly waves: ThreeWaves;
  /** Range of the pump's wavelength, if it may be tuned. */
  readonly tunable?: readonly [number, number] | null;
  readonly fibres?: { readonly signal?: number | undefined; readonly idler?: number | undefined };
}

/** Designs with the ledger's runs that hold them; null for a platform whose modes are not solved. */
export interface DesignsFound {
  readonly designs: SolvedDesigns | null;
  readonly runs: readonly string[];
}

/** The temperature (°C) at which modes are counted and coupled: they hardly depend on it. */
const OUTPUT_AT = 25;
/** A pump tuned so far (as a share of its wavelength) gets an area of its own. */
const TUNING_STEP = 0.02;

/**
 * Modes, areas and fibre couplings of a platform's designs: one design per drawn width (µm). What the ledger holds is
 * read from it, the rest is solved and kept in it; without a ledger nothing is kept.
 * @throws OutOfDate when something has to be solved and the ledger is open for reading only
 * @throws InputError for a platform file from which no design can be made
 */
export async function designsFor(
  ledger: Ledger | null,
  { platform, file }: Pick<LoadedPlatform, "platform" | "file">,
  widths_um: readonly number[],
  asked: readonly AskedWaves[],
  setting: SolveSetting = {},
): Promise<DesignsFound> {
  const { index } = platform;
  if (index.from !== "solver") return { designs: null, runs: [] };
  const widths = [...new Set(widths_um)].sort((a, b) => a - b);
  try {
    const designs = widths.map((width) => platformDesign(platform, index, width));
    const tasks = designs.flatMap((design) => tasksOf(design, asked));
    const { results, runs } = await piecesFor(ledger, platform.platform, tasks, setting);
    return { designs: assembled(designs, tasks, results, setting.grid ?? TABLE_GRID), runs };
  } catch (cause) {
    if (!(cause instanceof RangeError)) throw cause;
    throw new InputError(`Cannot use platform ${file}: ${cause.message}`, { file, column: "index" }, {
      cause,
    });
  }
}

function tasksOf(design: SolverDesign, asked: readonly AskedWaves[]): DesignTask[] {
  const tasks: DesignTask[] = [
    { kind: "modes", design, pol: "TE" },
    { kind: "modes", design, pol: "TM" },
  ];
  const [shortest, longest] = design.lambda;
  const covered = (lambda: number) => lambda >= shortest * (1 - 1e-9) && lambda <= longest * (1 + 1e-9);
  const fibres = new Map<string, { pol: Polarisation; lambda: number; fibres: Set<number> }>();
  const output = (pol: Polarisation, lambda: number, mfd?: number) => {
    if (!covered(lambda)) return; // the index has no answer there, and says so
    const held = fibres.get(`${pol}|${lambda}`) ?? { pol, lambda, fibres: new Set() };
    if (mfd !== undefined) held.fibres.add(mfd);
    fibres.set(`${pol}|${lambda}`, held);
  };
  for (const { waves, tunable = null, fibres: mfd = {} } of asked) {
    output(waves.polP, waves.lambdaP);
    output(waves.polS, waves.lambdaS, mfd.signal);
    output(waves.polI, waves.lambdaI, mfd.idler);
    for (const tuned of tunedWaves(waves, tunable)) {
      if (![tuned.lambdaP, tuned.lambdaS, tuned.lambdaI].every(covered)) continue;
      tasks.push({ kind: "areas", design, waves: tuned });
    }
  }
  for (const { pol, lambda, fibres: own } of fibres.values()) {
    tasks.push({
      kind: "output",
      design,
      pol,
      lambda,
      temperatureC: OUTPUT_AT,
      fibres: [...own].sort((a, b) => a - b),
    });
  }
  return tasks;
}

/** The waves as asked, and with the pump at steps of its tuning range that go farther than one area holds. */
function tunedWaves(waves: ThreeWaves, tunable: readonly [number, number] | null): ThreeWaves[] {
  const out = [waves];
  if (tunable === null) return out;
  for (const end of tunable) {
    const sign = Math.sign(end - waves.lambdaP);
    const reach = Math.abs(end / waves.lambdaP - 1);
    for (let k = 1; reach > (k - 0.5) * TUNING_STEP; k++) {
      const factor = 1 + sign * Math.min(k * TUNING_STEP, reach);
      out.push({
        ...waves,
        lambdaP: waves.lambdaP * factor,
        lambdaS: waves.lambdaS * factor,
        lambdaI: waves.lambdaI * factor,
      });
    }
  }
  return out;
}

function assembled(
  designs: readonly SolverDesign[],
  tasks: readonly DesignTask[],
  results: readonly TaskResult[],
  grid: TableGrid,
): SolvedDesigns {
  const modes = (design: SolverDesign, pol: Polarisation) =>
    results[tasks.findIndex((t) => t.kind === "modes" && t.design === design && t.pol === pol)] as
      | PolarisationTable
      | { readonly reason: string };
  return {
    tables: designs.map((design) =>
      designTable(design, grid, { TE: modes(design, "TE"), TM: modes(design, "TM") })
    ),
    areas: tasks.flatMap((task, k) => task.kind === "areas" ? [results[k] as DesignAreas] : []),
    outputs: tasks.flatMap((task, k) =>
      task.kind === "output"
        ? [{
          design: task.design,
          pol: task.pol,
          lambda: task.lambda,
          result: results[k] as DesignOutput | CutOff,
        }]
        : []
    ),
  };
}

/** What a request asks of designs. Its fibre diameters stand in µm. */
export function askedBy(
  request: {
    readonly waves: ThreeWaves;
    readonly request: {
      readonly pump?: { readonly tunable_nm?: readonly [number, number] | undefined } | undefined;
      readonly signal: { readonly fibre_mfd_um?: number | undefined };
      readonly idler?: { readonly fibre_mfd_um?: number | undefined } | undefined;
    };
  },
): AskedWaves {
  const { waves, request: { pump, signal, idler } } = request;
  const tunable = pump?.tunable_nm;
  const metres = (um: number | undefined) => um === undefined ? undefined : um * 1e-6;
  return {
    waves,
    tunable: tunable === undefined ? null : [nm(tunable[0]), nm(tunable[1])],
    fibres: { signal: metres(signal.fibre_mfd_um), idler: metres(idler?.fibre_mfd_um) },
  };
}
