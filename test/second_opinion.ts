// A second calculation of what the program predicts, from published formulas, sharing no code with models/: slow, plain
// sums on small grids. SI units unless the name says otherwise.
import { SVD } from "ml-matrix";
import sellmeier from "../fixtures/check-values/sellmeier.json" with { type: "json" };

export type Pol = "TE" | "TM";
type Axis = "y" | "z" | "o" | "e";
export interface Crystal {
  readonly axes: Readonly<Record<Pol, Axis>>;
  n(axis: Axis, um: number, T: number): number;
  /** length(T)/length(25 °C) along the guide. */
  stretch(T: number): number;
}

const C = 299_792_458; // m/s, exact (SI)
const EPS0 = 8.8541878128e-12; // F/m, CODATA 2018
const set = (id: string) =>
  sellmeier.sets.find((s) => s.id === id)!.coefficients as unknown as Record<string, number[]>;

/**
 * KTP, guide along x: König & Wong, Appl. Phys. Lett. 84, 1644 (2004) (n_y); Fradkin et al., Appl. Phys. Lett. 74, 914
 * (1999) (n_z); Emanueli & Arie, Appl. Opt. 42, 6661 (2003) (temperature, expansion).
 */
export const KTP: Crystal = {
  axes: { TE: "y", TM: "z" },
  n(axis, um, T) {
    const { n, a, b } = set(`ktp_${axis}`) as { n: number[]; a: number[]; b: number[] };
    const L2 = um * um;
    const square = axis === "y"
      ? n[0]! + n[1]! / (1 - n[2]! / L2) - n[3]! * L2
      : n[0]! + n[1]! / (1 - n[2]! / L2) + n[3]! / (1 - n[4]! / L2) - n[5]! * L2;
    const t = T - 25;
    const poly = (c: number[]) => c[0]! + c[1]! / um + c[2]! / um ** 2 + c[3]! / um ** 3;
    return Math.sqrt(square) + t * poly(a) + t * t * poly(b);
  },
  stretch: (T) => 1 + 6.7e-6 * (T - 25) + 11e-9 * (T - 25) ** 2,
};

/** Congruent LiNbO3, guide along x or y: Jundt, Opt. Lett. 22, 1553 (1997); Kim & Smith, J. Appl. Phys. 40, 4637 (1969). */
export const CLN: Crystal = {
  axes: { TE: "o", TM: "e" },
  n(axis, um, T) {
    if (axis !== "e") throw new Error("only the extraordinary index is needed here");
    const { a, b } = set("jundt_e") as { a: number[]; b: number[] };
    const f = (T - 24.5) * (T + 570.82);
    const L2 = um * um;
    return Math.sqrt(
      a[0]! + b[0]! * f + (a[1]! + b[1]! * f) / (L2 - (a[2]! + b[2]! * f) ** 2) +
        (a[3]! + b[3]! * f) / (L2 - a[4]! ** 2) - a[5]! * L2,
    );
  },
  stretch: (T) => 1 + 1.54e-5 * (T - 25) + 5.3e-9 * (T - 25) ** 2,
};

/** Wavelengths (m) and polarisations of pump, signal, idler. */
export interface Waves {
  readonly p: number;
  readonly s: number;
  readonly i: number;
  readonly pol: { readonly p: Pol; readonly s: Pol; readonly i: Pol };
}

export const index = (crystal: Crystal, pol: Pol, lambda: number, T: number): number =>
  crystal.n(crystal.axes[pol], lambda * 1e6, T);

const omega = (lambda: number) => 2 * Math.PI * C / lambda;
const beta = (crystal: Crystal, pol: Pol, w: number, T: number) =>
  index(crystal, pol, 2 * Math.PI * C / w, T) * w / C;

/** Δβ = β_p − β_s − β_i at temperature, 1/m. */
export const mismatch = (crystal: Crystal, { p, s, i, pol }: Waves, T: number): number =>
  beta(crystal, pol.p, omega(p), T) - beta(crystal, pol.s, omega(s), T) - beta(crystal, pol.i, omega(i), T);

/** Fresnel reflectivity of a bare facet in air. */
export const fresnel = (n: number): number => ((n - 1) / (n + 1)) ** 2;

/** Lowest T in the range where |Δβ| = 2π/Λ(T), by bisection after a scan; null when there is none. */
export function rootTemperature(
  crystal: Crystal,
  waves: Waves,
  periodUm: number,
  [low, high]: readonly [number, number],
): number | null {
  const miss = (T: number) =>
    Math.abs(mismatch(crystal, waves, T)) - 2 * Math.PI / (periodUm * 1e-6 * crystal.stretch(T));
  for (let a = low; a < high; a += 0.5) {
    let [x, y] = [a, Math.min(high, a + 0.5)];
    if (Math.sign(miss(x)) === Math.sign(miss(y))) continue;
    for (let k = 0; k < 60; k++) {
      const middle = (x + y) / 2;
      if (Math.sign(miss(middle)) === Math.sign(miss(x))) x = middle;
      else y = middle;
    }
    return (x + y) / 2;
  }
  return null;
}

/** A poled section in m at 25 °C: edges of its domains, the first of sign +1. */
export interface Domains {
  readonly edges: readonly number[];
  readonly poled: number;
}

export function domainsFromWalls(wallsUm: readonly number[], fromMm: number, poledMm: number): Domains {
  return {
    edges: [fromMm * 1e-3, ...wallsUm.map((z) => z * 1e-6), (fromMm + poledMm) * 1e-3],
    poled: poledMm * 1e-3,
  };
}

/** One inverted domain in the middle of each whole period; duty linear in z between the windows' middles. */
export function domainsFromDuty(
  windows: readonly (readonly [middleMm: number, duty: number])[],
  periodUm: number,
  fromMm: number,
  poledMm: number,
): Domains {
  const edges = [fromMm * 1e-3];
  const period = periodUm * 1e-3;
  for (let n = 0; n + 1 <= poledMm / period; n++) {
    const z = fromMm + (n + 0.5) * period;
    const after = windows.findIndex(([m]) => m > z);
    const [a, b] = after === -1
      ? [windows.at(-1)!, windows.at(-1)!]
      : after === 0
      ? [windows[0]!, windows[0]!]
      : [windows[after - 1]!, windows[after]!];
    const t = a === b ? 0 : (z - a[0]) / (b[0] - a[0]);
    const duty = a[1] + t * (b[1] - a[1]);
    edges.push((z - duty * period / 2) * 1e-3, (z + duty * period / 2) * 1e-3);
  }
  return { edges: [...edges, (fromMm + poledMm) * 1e-3], poled: poledMm * 1e-3 };
}

/** φ = (1/L)∫ d(z) e^{iΔβz − γz} dz over the domains, stretched; [re, im]. */
export function phi({ edges, poled }: Domains, deltaBeta: number, stretch = 1, decay = 0): [number, number] {
  let [re, im] = [0, 0];
  const power = decay * decay + deltaBeta * deltaBeta;
  let sign = 1;
  // Each edge ends one domain and begins the next of the other sign: exp/(iΔβ − γ) counts −2, the two ends ∓1.
  edges.forEach((edge, k) => {
    const z = edge * stretch;
    const size = Math.exp(-decay * z);
    const [c, s] = [size * Math.cos(deltaBeta * z), size * Math.sin(deltaBeta * z)];
    let weight: number;
    if (k === 0) weight = -1;
    else {
      weight = k === edges.length - 1 ? sign : 2 * sign;
      sign = -sign;
    }
    // (c + is)/(−γ + iΔβ) = (c + is)(−γ − iΔβ)/(γ² + Δβ²)
    re += weight * (-decay * c + deltaBeta * s) / power;
    im += weight * (-decay * s - deltaBeta * c) / power;
  });
  const length = poled * stretch;
  return [re / length, im / length];
}

export const phiSquared = (d: Domains, deltaBeta: number, stretch = 1, decay = 0): number => {
  const [re, im] = phi(d, deltaBeta, stretch, decay);
  return re * re + im * im;
};

/** Temperature where |φ|² of known walls peaks: scan, then golden section. */
export function peakTemperature(
  crystal: Crystal,
  waves: Waves,
  domains: Domains,
  [low, high]: readonly [number, number],
): number {
  const at = (T: number) => phiSquared(domains, mismatch(crystal, waves, T), crystal.stretch(T));
  let best = low;
  for (let T = low; T <= high; T += 0.25) if (at(T) > at(best)) best = T;
  let [a, b] = [best - 0.25, best + 0.25];
  const golden = (Math.sqrt(5) - 1) / 2;
  while (b - a > 1e-6) {
    const [x, y] = [b - golden * (b - a), a + golden * (b - a)];
    if (at(x) > at(y)) b = y;
    else a = x;
  }
  return (a + b) / 2;
}

/** dB/cm → 1/m. */
export const attenuation = (dbCm: number): number => dbCm * 100 * Math.log(10) / 10;

/** Klyshko's survival of an arm given the other, by Simpson's rule. Attenuations 1/m, lengths m. */
export function survival(
  alpha: { readonly pump: number; readonly own: number; readonly other: number },
  guide: number,
  from: number,
  to: number,
): number {
  const integral = (loss: number) => {
    const n = 400;
    const h = (to - from) / n;
    let sum = 0;
    for (let k = 0; k <= n; k++) {
      const z = from + k * h;
      sum += (k === 0 || k === n ? 1 : k % 2 === 1 ? 4 : 2) * Math.exp(-alpha.pump * z - loss * (guide - z));
    }
    return sum * h / 3;
  };
  return integral(alpha.own + alpha.other) / integral(alpha.other);
}

/** Power overlap of an elliptic Gaussian with a round one, from 1/e² diameters. */
export const gaussianOverlap = (x: number, y: number, fibre: number): number =>
  (2 * x * fibre / (x * x + fibre * fibre)) * (2 * y * fibre / (y * y + fibre * fibre));

/** Miller's rule: d at the waves' wavelengths from d at `at`, pump at half of it. Indices at 25 °C. */
export function miller(crystal: Crystal, d: number, at: number, { p, s, i, pol }: Waves): number {
  const chi = (which: Pol, lambda: number) => index(crystal, which, lambda, 25) ** 2 - 1;
  return d * chi(pol.p, p) * chi(pol.s, s) * chi(pol.i, i) /
    (chi(pol.p, at / 2) * chi(pol.s, at) * chi(pol.i, at));
}

/**
 * Device efficiency in %/W of a second harmonic (ω the fundamental) or a sum frequency (ω the sum): prefactor
 * 2ω²d²/(ε₀c³ n_p n_s n_i A) times L²|φ|², g(z) = exp(−(α_s+α_i)z/2 − α_p(L−z)/2), L to the output facet.
 */
export function efficiency(
  crystal: Crystal,
  waves: Waves,
  T: number,
  domains: Domains,
  of: {
    readonly kind: "second-harmonic" | "sum-frequency";
    readonly d: number;
    readonly area: number;
    readonly alpha: { readonly p: number; readonly s: number; readonly i: number };
    readonly guide: number;
  },
): number {
  const { p, s, i, pol } = waves;
  const w = of.kind === "second-harmonic" ? omega(2 * p) : omega(p);
  const n = index(crystal, pol.p, p, T) * index(crystal, pol.s, s, T) * index(crystal, pol.i, i, T);
  const prefactor = 2 * w * w * of.d * of.d / (EPS0 * C ** 3 * n * of.area);
  const stretch = crystal.stretch(T);
  const { alpha } = of;
  const decay = (alpha.s + alpha.i - alpha.p) / 2;
  const amplitude = Math.exp(-alpha.p * of.guide * stretch / 2);
  const size = phiSquared(domains, mismatch(crystal, waves, T), stretch, decay) * amplitude ** 2;
  return 100 * prefactor * (domains.poled * stretch) ** 2 * size;
}

export interface FilterShape {
  readonly shape: string;
  readonly fwhm_nm: number;
  readonly peak: number;
}

/** Power transmission of a filter at an angular frequency. */
function transmission(filter: FilterShape | null, centre: number, w: number): number {
  if (filter === null) return 1;
  const off = 2 * Math.PI * C / w - centre;
  const width = filter.fwhm_nm * 1e-9;
  if (filter.shape === "flat-top") return Math.abs(off) <= width / 2 ? filter.peak : 0;
  return filter.peak * Math.exp(-4 * Math.LN2 * (off / width) ** 2);
}

/** Window of an arm in ω: the filter's band (±2 FWHM of a Gaussian), else ±max(10·2π/(L|k′_s−k′_i|), 3 pump FWHM). */
function windowOf(filter: FilterShape | null, centre: number, half: number): readonly [number, number] {
  if (filter === null) return [omega(centre) - half, omega(centre) + half];
  const reach = filter.fwhm_nm * 1e-9 * (filter.shape === "flat-top" ? 0.5 : 2);
  return [omega(centre + reach), omega(centre - reach)];
}

export interface PairCase {
  readonly crystal: Crystal;
  readonly waves: Waves;
  readonly T: number;
  readonly domains: Domains;
  /** Transform-limited intensity FWHM (s) of a Gaussian pulse, and its group-delay dispersion (s²). */
  readonly fwhm: number;
  readonly gdd: number;
  readonly pumpLoss: number;
  readonly signal: FilterShape | null;
  readonly idler: FilterShape | null;
}

/** Purity of the filtered joint amplitude on a grid of n × n midpoints over the stated windows, by ml-matrix's SVD. */
export function purity(of: PairCase, n: number): number {
  const { waves, signal, idler } = of;
  const half = openHalf(of);
  const s = midpoints(windowOf(signal, waves.s, half), n);
  const i = midpoints(windowOf(idler, waves.i, half), n);
  const re = s.map(() => new Array<number>(n));
  const im = s.map(() => new Array<number>(n));
  s.forEach((ws, a) =>
    i.forEach((wi, b) => {
      const [x, y] = amplitude(of, ws, wi);
      const t = Math.sqrt(transmission(signal, waves.s, ws) * transmission(idler, waves.i, wi));
      re[a]![b] = t * x;
      im[a]![b] = t * y;
    })
  );
  // [[Re, −Im], [Im, Re]] has every singular value of Re + i·Im twice.
  const rows = [
    ...re.map((row, a) => [...row, ...im[a]!.map((x) => -x)]),
    ...im.map((row, a) => [...row, ...re[a]!]),
  ];
  const { diagonal } = new SVD(rows, {
    computeLeftSingularVectors: false,
    computeRightSingularVectors: false,
  });
  const squares = diagonal.map((x) => x * x);
  const total = squares.reduce((sum, x) => sum + x, 0);
  return 2 * squares.reduce((sum, x) => sum + x * x, 0) / total ** 2;
}

/** filter_signal and filter_idler: share of an arm's photons that pass its filter, given that the other has passed its own. */
export function filterShares(of: PairCase, n: number): { signal: number; idler: number } {
  const { waves, signal, idler } = of;
  const half = openHalf(of);
  const union = (f: FilterShape | null, centre: number) => {
    const [a, b] = [windowOf(f, centre, half), windowOf(null, centre, half)];
    return [Math.min(a[0], b[0]), Math.max(a[1], b[1])] as const;
  };
  const [s, i] = [midpoints(union(signal, waves.s), n), midpoints(union(idler, waves.i), n)];
  let [both, onlyS, onlyI] = [0, 0, 0];
  for (const ws of s) {
    const ts = transmission(signal, waves.s, ws);
    for (const wi of i) {
      const ti = transmission(idler, waves.i, wi);
      if (ts === 0 && ti === 0) continue;
      const [x, y] = amplitude(of, ws, wi);
      const power = x * x + y * y;
      both += power * ts * ti;
      onlyS += power * ts;
      onlyI += power * ti;
    }
  }
  return { signal: both / onlyI, idler: both / onlyS };
}

/** Mean pairs per pulse: Γ²L²∬|α|²|φ|²dω_s dω_i/(2π)², ∫|α|²dω/2π = pulse energy, over the stated windows. */
export function pairsPerPulse(
  of: PairCase,
  energy: number,
  strength: { readonly d: number; readonly area: number },
  n: number,
): number {
  const { crystal, waves, T, domains, fwhm } = of;
  const half = openHalf(of);
  const [ds, di] = [windowOf(of.signal, waves.s, half), windowOf(of.idler, waves.i, half)];
  let sum = 0;
  for (const ws of midpoints(ds, n)) {
    for (const wi of midpoints(di, n)) {
      const [x, y] = amplitude(of, ws, wi);
      sum += x * x + y * y;
    }
  }
  sum *= (ds[1] - ds[0]) * (di[1] - di[0]) / (n * n) / (4 * Math.PI ** 2);
  // |exp(−Ω²τ²/(8 ln 2))|² integrates to √(4π ln 2)/τ.
  const norm = energy / (Math.sqrt(4 * Math.PI * Math.LN2) / fwhm / (2 * Math.PI));
  const { p, s, i, pol } = waves;
  const indices = index(crystal, pol.p, p, T) * index(crystal, pol.s, s, T) * index(crystal, pol.i, i, T);
  const gamma = 2 * omega(s) * omega(i) * strength.d ** 2 / (EPS0 * C ** 3 * indices * strength.area);
  return gamma * (domains.poled * crystal.stretch(T)) ** 2 * norm * sum;
}

/** α(ω_s+ω_i)·φ(Δβ), pump amplitude 1 at its centre. */
function amplitude(of: PairCase, ws: number, wi: number): [number, number] {
  const { crystal, waves, T, domains, fwhm, gdd, pumpLoss } = of;
  const { pol } = waves;
  const off = ws + wi - omega(waves.p);
  const size = Math.exp(-off * off * fwhm * fwhm / (8 * Math.LN2));
  if (size < 1e-9) return [0, 0];
  const deltaBeta = beta(crystal, pol.p, ws + wi, T) - beta(crystal, pol.s, ws, T) -
    beta(crystal, pol.i, wi, T);
  const [re, im] = phi(domains, deltaBeta, crystal.stretch(T), pumpLoss / 2);
  const [c, s] = [size * Math.cos(gdd * off * off / 2), size * Math.sin(gdd * off * off / 2)];
  return [re * c - im * s, re * s + im * c];
}

/** Half-width of an unfiltered arm, rad/s; group delays by a central difference. */
function openHalf({ crystal, waves, T, domains, fwhm }: PairCase): number {
  const slope = (pol: Pol, lambda: number) => {
    const w = omega(lambda);
    const h = 1e-4 * w;
    return (beta(crystal, pol, w + h, T) - beta(crystal, pol, w - h, T)) / (2 * h);
  };
  const delay = Math.abs(slope(waves.pol.s, waves.s) - slope(waves.pol.i, waves.i));
  const length = domains.poled * crystal.stretch(T);
  return Math.max(10 * 2 * Math.PI / (length * delay), 3 * 4 * Math.LN2 / fwhm);
}

const midpoints = ([a, b]: readonly [number, number], n: number): number[] =>
  Array.from({ length: n }, (_, k) => a + (k + 0.5) * (b - a) / n);
