// Pure: no I/O, no clock, no hidden randomness.
// The words that every room uses for the same thing.

/** Polarisation in the lab frame. */
export type Polarisation = "TE" | "TM";
export const POLARISATIONS: readonly Polarisation[] = ["TE", "TM"];

/** What a trait or figure rests on, strongest first. */
export const BASES = ["measured", "die", "wafer", "lot", "platform"] as const;
export type Basis = typeof BASES[number];

/** The weakest of some bases; `measured` when there is none (a number given by the request counts as measured). */
export function weakestBasis(bases: Iterable<Basis>): Basis {
  let worst = 0;
  for (const b of bases) worst = Math.max(worst, BASES.indexOf(b));
  return BASES[worst]!;
}

export const PROCESSES = [
  "second-harmonic",
  "sum-frequency",
  "difference-frequency",
  "pair-generation",
] as const;
export type Process = typeof PROCESSES[number];

/** The three waves of a process: pump has the highest frequency, ω_p = ω_s + ω_i. Vacuum wavelengths in m. */
export interface ThreeWaves {
  readonly lambdaP: number;
  readonly lambdaS: number;
  readonly lambdaI: number;
  readonly polP: Polarisation;
  readonly polS: Polarisation;
  readonly polI: Polarisation;
}

/** Geometry of a guide's cross-section, as the index models take it (units in the names; missing = not known). */
export interface GuideGeometry {
  readonly width_um: number;
  readonly film_thickness_nm?: number;
  readonly etch_depth_nm?: number;
  readonly titanium_nm?: number;
}

/** A value with its standard uncertainty (k = 1), same unit. */
export interface Uncertain {
  readonly value: number;
  readonly u: number;
}
