// Pure: no I/O, no clock, no hidden randomness.
import { z } from "zod";
import { type Figure, figureAbsence, FIGURES } from "./figures.ts";
import { PROCESSES, type ThreeWaves } from "../vocabulary.ts";
import { nm } from "../units.ts";

const polarisation = z.enum(["TE", "TM"]);
const wavelength = z.number().min(200).max(20_000);
const fraction = z.number().min(0).max(1);

const filterSchema = z.strictObject({
  shape: z.enum(["flat-top", "gaussian"]),
  fwhm_nm: z.number().positive(),
  peak: fraction.default(1),
  centre_nm: wavelength.optional(),
});

const detectorSchema = z.strictObject({ efficiency: fraction, dark_hz: z.number().min(0).default(0) });

const armSchema = z.strictObject({
  wavelength_nm: wavelength.optional(),
  average_power_mw: z.number().positive().optional(),
  fibre_mfd_um: z.number().positive().optional(),
  outside_index: z.number().min(1).max(4).optional(),
  filter: filterSchema.optional(),
  detector: detectorSchema.optional(),
});

const pumpSchema = z.strictObject({
  wavelength_nm: wavelength.optional(),
  tunable_nm: z.tuple([wavelength, wavelength]).refine(([a, b]) => a <= b, "need [lower, upper]").optional(),
  fwhm_ps: z.number().positive().optional(),
  fwhm_nm: z.number().positive().optional(),
  shape: z.enum(["gaussian", "sech", "spectrum"]).optional(),
  spectrum: z.string().min(1).optional(),
  gdd_fs2: z.number().default(0),
  average_power_mw: z.number().positive().optional(),
  repetition_mhz: z.number().positive().optional(),
});

const requirementSchema = z.strictObject({
  figure: z.string(),
  at_least: z.number().optional(),
  at_most: z.number().optional(),
});

/** `<name>.json`: what an experiment needs (formats: "Source requests"). Cross-field rules: {@link checkRequest}. */
export const requestSchema = z.strictObject({
  $schema: z.string().optional(),
  request: z.string().regex(/^[A-Za-z0-9][A-Za-z0-9._-]*$/, "need letters, digits, '.', '_' or '-'"),
  process: z.enum(PROCESSES),
  polarisations: z.strictObject({ pump: polarisation, signal: polarisation, idler: polarisation }),
  pump: pumpSchema.optional(),
  signal: armSchema,
  idler: armSchema.optional(),
  window_ns: z.number().positive().default(1),
  oven_c: z.tuple([z.number(), z.number()]).refine(([a, b]) => a <= b, "need [lowest, highest]"),
  require: z.array(requirementSchema).default([]),
  decide: z.strictObject({ accept_at: fraction, reject_below: fraction })
    .refine((d) => d.reject_below <= d.accept_at, "need reject_below <= accept_at")
    .default({ accept_at: 0.9, reject_below: 0.1 }),
  order_by: z.string().default("probability"),
});
export type Request = z.infer<typeof requestSchema>;
export type ArmRequest = z.infer<typeof armSchema>;
export type FilterRequest = z.infer<typeof filterSchema>;

export interface Requirement {
  readonly figure: Figure;
  readonly atLeast: number;
  readonly atMost: number;
}

/** A request whose fields agree with each other; wavelengths in m. */
export interface CheckedRequest {
  readonly request: Request;
  readonly waves: ThreeWaves;
  /** `TE>TE+TM`: pump>signal+idler. */
  readonly processKey: string;
  readonly pulsed: boolean;
  readonly requirements: readonly Requirement[];
  /** Figure that orders the dies, or `probability`. */
  readonly orderBy: Figure | "probability";
  /** True when more is better. */
  readonly descending: boolean;
}

export interface RequestProblem {
  readonly field: string;
  readonly reason: string;
}

/** Signal and idler wavelengths may miss energy conservation by this much in the idler, nm. */
const ENERGY_TOLERANCE_NM = 0.05;

/** Cross-field rules of a request: a checked request, or the fields that can't be and why. */
export function checkRequest(
  request: Request,
): CheckedRequest | { readonly problems: readonly RequestProblem[] } {
  const problems: RequestProblem[] = [];
  const waves = resolveWaves(request, problems);
  const pump = request.pump ?? { gdd_fs2: 0 };
  const pairs = request.process === "pair-generation";
  const pulsed = pairs &&
    (pump.fwhm_ps !== undefined || pump.fwhm_nm !== undefined || pump.shape === "spectrum");
  if (pairs) checkPump(pump, pulsed, problems);
  if (request.process !== "pair-generation") checkPowers(request, problems);
  const requirements = checkRequirements(request, pulsed, problems);
  const orderBy = request.order_by;
  if (orderBy !== "probability") {
    if (!isFigure(orderBy)) problems.push({ field: "order_by", reason: unknownFigure(orderBy) });
    else {
      const absence = figureAbsence(orderBy, request.process, pulsed);
      if (absence !== null) {
        problems.push({ field: "order_by", reason: `"${orderBy}" can't exist: ${absence}` });
      }
    }
  }
  if (problems.length > 0 || waves === null) return { problems };
  const limitedAbove = requirements.some((r) =>
    r.figure === orderBy && Number.isFinite(r.atMost) && !Number.isFinite(r.atLeast)
  );
  const { pump: p, signal: s, idler: i } = request.polarisations;
  return {
    request,
    waves,
    processKey: `${p}>${s}+${i}`,
    pulsed,
    requirements,
    orderBy: orderBy as Figure | "probability",
    descending: !limitedAbove,
  };
}

function resolveWaves(request: Request, problems: RequestProblem[]): ThreeWaves | null {
  const pump = request.pump?.wavelength_nm;
  let signal = request.signal.wavelength_nm;
  let idler = request.idler?.wavelength_nm;
  if (request.process === "second-harmonic") {
    signal ??= idler;
    idler ??= signal;
    if (signal === undefined) {
      problems.push({
        field: "signal.wavelength_nm",
        reason: "missing: second harmonic needs its fundamental",
      });
      return null;
    }
    if (signal !== idler) {
      problems.push({
        field: "idler.wavelength_nm",
        reason:
          `${idler} nm is not the signal's ${signal} nm: second harmonic has one fundamental wavelength`,
      });
      return null;
    }
  }
  const known = [pump, signal, idler].filter((w) => w !== undefined).length;
  if (known < 2) {
    const field = pump === undefined ? "pump.wavelength_nm" : "signal.wavelength_nm";
    problems.push({ field, reason: "missing: two of pump, signal and idler wavelengths are needed" });
    return null;
  }
  const lambdaP = pump ?? 1 / (1 / signal! + 1 / idler!);
  const lambdaS = signal ?? 1 / (1 / lambdaP - 1 / idler!);
  const lambdaI = 1 / (1 / lambdaP - 1 / lambdaS);
  if (!(lambdaI > 0) || !(lambdaS > 0) || lambdaP >= lambdaS || lambdaP >= lambdaI) {
    problems.push({
      field: "signal.wavelength_nm",
      reason:
        `pump ${lambdaP} nm and signal ${lambdaS} nm leave no idler: the pump must have the shortest wavelength`,
    });
    return null;
  }
  if (idler !== undefined && Math.abs(lambdaI - idler) > ENERGY_TOLERANCE_NM) {
    problems.push({
      field: "idler.wavelength_nm",
      reason: `${idler} nm breaks energy conservation: 1/pump − 1/signal gives ${
        lambdaI.toFixed(3)
      } nm (a miss up to ${ENERGY_TOLERANCE_NM} nm is put right)`,
    });
    return null;
  }
  const { pump: polP, signal: polS, idler: polI } = request.polarisations;
  // The pump of a second harmonic follows from its fundamental: what energy conservation leaves over is put right there.
  if (request.process === "second-harmonic") {
    return { lambdaP: nm(lambdaS / 2), lambdaS: nm(lambdaS), lambdaI: nm(lambdaS), polP, polS, polI };
  }
  return { lambdaP: nm(lambdaP), lambdaS: nm(lambdaS), lambdaI: nm(lambdaI), polP, polS, polI };
}

/** True when signal and idler are one wavelength within the tolerance of energy conservation. */
export function isDegenerate(waves: ThreeWaves): boolean {
  return Math.abs(waves.lambdaS - waves.lambdaI) <= nm(ENERGY_TOLERANCE_NM);
}

function checkPump(pump: NonNullable<Request["pump"]>, pulsed: boolean, problems: RequestProblem[]): void {
  if (pump.average_power_mw === undefined) {
    problems.push({
      field: "pump.average_power_mw",
      reason: "missing: pair generation needs the pump power in the guide",
    });
  }
  if (pump.fwhm_ps !== undefined && pump.fwhm_nm !== undefined) {
    problems.push({ field: "pump.fwhm_nm", reason: "given beside fwhm_ps: give one of them" });
  }
  if (pump.shape === "spectrum" && pump.spectrum === undefined) {
    problems.push({
      field: "pump.spectrum",
      reason: "missing: shape spectrum needs a CSV file of wavelength_nm, intensity",
    });
  }
  if (pump.spectrum !== undefined && pump.shape !== "spectrum") {
    problems.push({ field: "pump.shape", reason: 'a spectrum file is given: shape must be "spectrum"' });
  }
  if (pulsed && pump.repetition_mhz === undefined) {
    problems.push({
      field: "pump.repetition_mhz",
      reason: "missing: a pulsed pump needs its repetition rate",
    });
  }
  if (!pulsed && pump.gdd_fs2 !== 0) {
    problems.push({
      field: "pump.gdd_fs2",
      reason: "a continuous-wave pump has no chirp: give fwhm_ps or fwhm_nm, or leave it out",
    });
  }
}

function checkPowers(request: Request, problems: RequestProblem[]): void {
  const { signal, idler } = request;
  if (
    request.process === "second-harmonic" && signal.average_power_mw !== undefined &&
    idler?.average_power_mw !== undefined
  ) {
    problems.push({
      field: "idler.average_power_mw",
      reason:
        "given beside the signal's: a second harmonic has one fundamental; give its whole power as the signal's",
    });
  }
  const asksPower = request.order_by === "peak_conversion" ||
    request.require.some((r) => r.figure === "peak_conversion");
  if (!asksPower) return;
  // The wave that is made has no power to give: pump in second harmonic and sum frequency, idler in difference frequency.
  const inputs = request.process === "difference-frequency"
    ? [request.pump?.average_power_mw, request.signal.average_power_mw]
    : [request.signal.average_power_mw, request.idler?.average_power_mw];
  if (inputs.every((p) => p === undefined)) {
    problems.push({
      field: request.process === "difference-frequency" ? "pump.average_power_mw" : "signal.average_power_mw",
      reason: "missing: peak_conversion needs the power of the strong input",
    });
  }
}

function checkRequirements(request: Request, pulsed: boolean, problems: RequestProblem[]): Requirement[] {
  const out: Requirement[] = [];
  request.require.forEach((r, k) => {
    const field = `require[${k}].figure`;
    if (!isFigure(r.figure)) return void problems.push({ field, reason: unknownFigure(r.figure) });
    const absence = figureAbsence(r.figure, request.process, pulsed);
    if (absence !== null) {
      return void problems.push({ field, reason: `"${r.figure}" can't exist: ${absence}` });
    }
    if (r.at_least === undefined && r.at_most === undefined) {
      return void problems.push({
        field: `require[${k}]`,
        reason: "has no limit: give at_least, at_most or both",
      });
    }
    const atLeast = r.at_least ?? -Infinity;
    const atMost = r.at_most ?? Infinity;
    if (atLeast > atMost) {
      return void problems.push({
        field: `require[${k}]`,
        reason: `at_least ${atLeast} is above at_most ${atMost}`,
      });
    }
    if (r.figure === "g2_heralded" && atMost <= 0) {
      return void problems.push({
        field: `require[${k}].at_most`,
        reason: `${atMost} is a limit that no source of pairs meets: need a number above 0`,
      });
    }
    out.push({ figure: r.figure, atLeast, atMost });
  });
  return out;
}

const isFigure = (name: string): name is Figure => (FIGURES as readonly string[]).includes(name);
const unknownFigure = (name: string): string => `"${name}" is not a figure; known: ${FIGURES.join(", ")}`;
