// Pure: no I/O, no clock, no hidden randomness.
// The algebraic forms in which refractive indices are published. L is the vacuum wavelength in µm, T in °C: the
// coefficients below are printed in these units, and converting them would hide misprints.
// Every form gives n and its analytic derivative dn/dL; nothing is allocated when one is evaluated.

/** One published index equation, ready to be evaluated. */
export interface DispersionForm {
  /** Refractive index at L (µm) and T (°C). */
  index(L: number, T: number): number;
  /** dn/dL in 1/µm at constant temperature. */
  slope(L: number, T: number): number;
}

type Numbers<N extends number, A extends number[] = []> = A["length"] extends N ? readonly [...A]
  : Numbers<N, [...A, number]>;

/**
 * n² = a1 + b1·f + (a2 + b2·f)/(L² − (a3 + b3·f)²) + (a4 + b4·f)/(L² − a5²) − a6·L², with the **product**
 * f = (T − 24.5)(T + 570.82): D. H. Jundt, Opt. Lett. 22, 1553 (1997), also used by Gayer et al., Appl. Phys. B 91, 343 (2008).
 */
export function jundtForm(a: Numbers<6>, b: Numbers<4>): DispersionForm {
  const [a1, a2, a3, a4, a5, a6] = a;
  const [b1, b2, b3, b4] = b;
  const infrared = a5 * a5;
  const index = (L: number, T: number): number => {
    const f = (T - 24.5) * (T + 570.82);
    const x = L * L;
    const pole = a3 + b3 * f;
    return Math.sqrt(
      a1 + b1 * f + (a2 + b2 * f) / (x - pole * pole) + (a4 + b4 * f) / (x - infrared) - a6 * x,
    );
  };
  const slope = (L: number, T: number): number => {
    const f = (T - 24.5) * (T + 570.82);
    const x = L * L;
    const pole = a3 + b3 * f;
    const u = x - pole * pole;
    const v = x - infrared;
    return L * (-(a2 + b2 * f) / (u * u) - (a4 + b4 * f) / (v * v) - a6) / index(L, T);
  };
  return { index, slope };
}

/**
 * n² = A1 + (A2 + B1·F)/(L² − (A3 + B2·F)²) + B3·F − A4·L², F = (T − 24.5)(T + 570.5):
 * G. J. Edwards & M. Lawrence, Opt. Quantum Electron. 16, 373 (1984).
 */
export function edwardsLawrenceForm(A: Numbers<4>, B: Numbers<3>): DispersionForm {
  const [A1, A2, A3, A4] = A;
  const [B1, B2, B3] = B;
  const index = (L: number, T: number): number => {
    const F = (T - 24.5) * (T + 570.5);
    const x = L * L;
    const pole = A3 + B2 * F;
    return Math.sqrt(A1 + (A2 + B1 * F) / (x - pole * pole) + B3 * F - A4 * x);
  };
  const slope = (L: number, T: number): number => {
    const F = (T - 24.5) * (T + 570.5);
    const pole = A3 + B2 * F;
    const u = L * L - pole * pole;
    return L * (-(A2 + B1 * F) / (u * u) - A4) / index(L, T);
  };
  return { index, slope };
}

/**
 * n² = 1 + Σ S·L²/(L² − R), coefficients in the order S1, R1, S2, R2, S3, R3; one temperature only:
 * D. E. Zelmon, D. L. Small & D. Jundt, J. Opt. Soc. Am. B 14, 3319 (1997).
 */
export function threeTermForm(c: Numbers<6>): DispersionForm {
  const [S1, R1, S2, R2, S3, R3] = c;
  const index = (L: number): number => {
    const x = L * L;
    return Math.sqrt(1 + S1 * x / (x - R1) + S2 * x / (x - R2) + S3 * x / (x - R3));
  };
  const slope = (L: number): number => {
    const x = L * L;
    const u = x - R1;
    const v = x - R2;
    const w = x - R3;
    return -L * (S1 * R1 / (u * u) + S2 * R2 / (v * v) + S3 * R3 / (w * w)) / index(L);
  };
  return { index, slope };
}

/**
 * n² = A + B/(L² − C) + D/(L² − E) at 20 °C and n(T) = n(20) + (T − 20)·1e-5·(t3/L³ + t2/L² + t1/L + t0), t in the
 * order t3, t2, t1, t0: K. Kato & E. Takaoka, Appl. Opt. 41, 5040 (2002). E exceeds L², so the last term is negative.
 */
export function katoForm(n: Numbers<5>, t: Numbers<4>): DispersionForm {
  const [A, B, C, D, E] = n;
  const [t3, t2, t1, t0] = t;
  const cold = (L: number): number => {
    const x = L * L;
    return Math.sqrt(A + B / (x - C) + D / (x - E));
  };
  const index = (L: number, T: number): number => {
    const y = 1 / L;
    return cold(L) + (T - 20) * 1e-5 * (((t3 * y + t2) * y + t1) * y + t0);
  };
  const slope = (L: number, T: number): number => {
    const y = 1 / L;
    const u = L * L - C;
    const v = L * L - E;
    return -L * (B / (u * u) + D / (v * v)) / cold(L) -
      (T - 20) * 1e-5 * ((3 * t3 * y + 2 * t2) * y + t1) * y * y;
  };
  return { index, slope };
}

/** Thermo-optic part Σ a_k/L^k·(T − 25) + Σ b_k/L^k·(T − 25)², k = 0…3: S. Emanueli & A. Arie, Appl. Opt. 42, 6661 (2003). */
export interface ThermoOptic {
  readonly a: Numbers<4>;
  readonly b: Numbers<4>;
}

/**
 * n = √(n0 + n1/(1 − n2/L²) + n3/(1 − n4/L²) − n5·L²) + thermo-optic part, for KTiOPO4. The five-parameter
 * equations without a second pole (Fan et al. 1987; König & Wong 2004) have n3 = 0.
 */
export function ktpForm(n: Numbers<6>, thermal: ThermoOptic | null): DispersionForm {
  const [n0, n1, n2, n3, n4, n5] = n;
  const [a0, a1, a2, a3] = thermal?.a ?? [0, 0, 0, 0];
  const [b0, b1, b2, b3] = thermal?.b ?? [0, 0, 0, 0];
  const cold = (L: number): number => {
    const x = L * L;
    return Math.sqrt(n0 + n1 * x / (x - n2) + n3 * x / (x - n4) - n5 * x);
  };
  const index = (L: number, T: number): number => {
    const y = 1 / L;
    const t = T - 25;
    return cold(L) + t * (((a3 * y + a2) * y + a1) * y + a0 + t * (((b3 * y + b2) * y + b1) * y + b0));
  };
  const slope = (L: number, T: number): number => {
    const x = L * L;
    const y = 1 / L;
    const t = T - 25;
    const u = x - n2;
    const v = x - n4;
    return -L * (n1 * n2 / (u * u) + n3 * n4 / (v * v) + n5) / cold(L) -
      y * y * t * ((3 * a3 * y + 2 * a2) * y + a1 + t * ((3 * b3 * y + 2 * b2) * y + b1));
  };
  return { index, slope };
}
