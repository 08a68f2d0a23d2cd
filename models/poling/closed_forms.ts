// Pure: no I/O, no clock, no hidden randomness.
// Efficiencies |φ|² relative to the ideal first-order grating, (2/π)². Averages are over realisations.
// M. M. Fejer, G. A. Magel, D. H. Jundt & R. L. Byer, IEEE J. Quantum Electron. 28, 2631 (1992); S. Helmfrid,
// G. Arvidsson & J. Webjörn, J. Opt. Soc. Am. B 10, 222 (1993); J. S. Pelc et al., Opt. Lett. 36, 864 (2011). The
// averages with a finite number of domains are derived in the comments.

function need(ok: boolean, what: string, found: number, wanted: string): void {
  if (!ok) throw new RangeError(`Cannot evaluate a grating average: ${what} is ${found}, need ${wanted}`);
}

/** |φ|² of the ideal first-order grating on its peak. */
export const IDEAL_POWER = (2 / Math.PI) ** 2;

/** Δβ·L at full width of half maximum of sinc²(ΔβL/2): four times the root 1.391557 of sin²x/x² = ½. */
export const SINC_SQUARED_WIDTH = 5.566_229_513_006;

/** Signed amplitude relative to the ideal first order: sin(mπD)/m for order m and duty D. */
export function dutyFactor(duty: number, order = 1): number {
  need(duty >= 0 && duty <= 1, "duty", duty, "0…1");
  need(Number.isSafeInteger(order) && order >= 1, "order", order, "an integer >= 1");
  return Math.sin(order * Math.PI * duty) / order;
}

/**
 * Independent wall errors: N domains of nominal length l, walls off by a normal error of standard deviation σ, first and
 * last face fixed. With D = (πσ/l)²: every wall keeps the share e^(−D/2) of its phasor on average. For large N this is
 * e^(−D) + (1 − e^(−D))/N.
 * @param sigmaOverDomain σ/l
 */
export function randomWallEfficiency(sigmaOverDomain: number, domains: number): number {
  need(sigmaOverDomain >= 0, "sigma/domain", sigmaOverDomain, ">= 0");
  need(Number.isSafeInteger(domains) && domains >= 1, "number of domains", domains, "an integer >= 1");
  const d = (Math.PI * sigmaOverDomain) ** 2;
  const walls = domains - 1;
  // Phasors: 2·walls random ones and 2 from the faces, in units of a face.
  const mean = (2 * walls * Math.exp(-d / 2) + 2) ** 2;
  const spread = 4 * walls * -Math.expm1(-d);
  return (mean + spread) / (2 * domains) ** 2;
}

/**
 * Accumulating errors: domain lengths independent, l + N(0, σ²). The phase walks; with ρ = e^(−(πσ/l)²/2) the average is
 * [N(1−ρ²) − 2ρ(1−ρ^N)]/[N(1−ρ)]².
 */
export function randomWalkEfficiency(sigmaOverDomain: number, domains: number): number {
  need(sigmaOverDomain >= 0, "sigma/domain", sigmaOverDomain, ">= 0");
  need(Number.isSafeInteger(domains) && domains >= 1, "number of domains", domains, "an integer >= 1");
  const a = (Math.PI * sigmaOverDomain) ** 2 / 2;
  const n = domains;
  const gap = -Math.expm1(-a); // 1 − ρ
  const rho = 1 - gap;
  // Here the closed form would cancel: expand the double sum over e^(−a|j−k|) that it comes from.
  if (n * gap < 1e-3) return 1 - a * (n - 1 / n) / 3 + a * a * (n * n - 1) / 12;
  return (n * gap * (1 + rho) + 2 * rho * Math.expm1(-a * n)) / (n * gap) ** 2;
}

/**
 * Every inverted domain missing with probability p, of N domains of both kinds: (1−p)² + 2p(1−p)/N. The mean amplitude
 * is 1 − p; each of the N/2 inverted domains adds its variance p(1−p) over (N/2)².
 */
export function missingDomainEfficiency(missing: number, domains: number): number {
  need(missing >= 0 && missing <= 1, "missing fraction", missing, "0…1");
  need(domains >= 1, "number of domains", domains, ">= 1");
  return (1 - missing) ** 2 + 2 * missing * (1 - missing) / domains;
}

/**
 * Noise far from the peak that independent wall errors leave, relative to the ideal peak:
 * (π/(Δβ·l))²·(1 − e^(−Δβ²σ²))/N.
 * @param deltaBetaTimesDomain Δβ·l, rad (π on the peak)
 */
export function pedestal(deltaBetaTimesDomain: number, sigmaOverDomain: number, domains: number): number {
  need(Math.abs(deltaBetaTimesDomain) > 0, "Δβ·domain", deltaBetaTimesDomain, "a number other than 0");
  need(sigmaOverDomain >= 0, "sigma/domain", sigmaOverDomain, ">= 0");
  need(domains >= 1, "number of domains", domains, ">= 1");
  return (Math.PI / deltaBetaTimesDomain) ** 2 *
    -Math.expm1(-((deltaBetaTimesDomain * sigmaOverDomain) ** 2)) /
    domains;
}

/**
 * All that `realiseGrating` does, on the peak: M inverted domains (one per period) of duty D with the spread `dutySd`
 * from independent walls, missing with probability p. A domain that is there contributes e^(iKa) − e^(iKb) with mean
 * 2 sin(πD)·e^(−v/2) and mean square 2 − 2cos(2πD)·e^(−v), v = (Kσ_wall)² = 2π²·dutySd².
 */
export function realisedEfficiency(
  of: { readonly duty: number; readonly dutySd: number; readonly missing: number },
  invertedDomains: number,
): number {
  need(of.duty >= 0 && of.duty <= 1, "duty", of.duty, "0…1");
  need(of.dutySd >= 0, "spread of the duty", of.dutySd, ">= 0");
  need(of.missing >= 0 && of.missing <= 1, "missing fraction", of.missing, "0…1");
  need(
    Number.isSafeInteger(invertedDomains) && invertedDomains >= 1,
    "domains",
    invertedDomains,
    "an integer >= 1",
  );
  const v = 2 * (Math.PI * of.dutySd) ** 2;
  const there = 1 - of.missing;
  const mean = there * 2 * Math.sin(Math.PI * of.duty) * Math.exp(-v / 2);
  const square = there * (2 - 2 * Math.cos(2 * Math.PI * of.duty) * Math.exp(-v));
  return (mean * mean + (square - mean * mean) / invertedDomains) / 4;
}

/**
 * Amplitude factor of a linear drift of the mismatch, at the nominal point: ∫₀¹ e^(iφu²) du, a Fresnel integral, for the
 * phase φ that the drift has run up at both ends against the middle: δβ(z) = (8φ/L²)(z − L/2).
 * @throws RangeError beyond |φ| = 20, where the series would lose digits
 */
export function linearDriftFactor(phase: number): { re: number; im: number } {
  need(Math.abs(phase) <= 20, "phase", phase, "at most 20 rad in size");
  // Σ (iφ)^n/(n!(2n+1)); powers of i by turns.
  let term = 1;
  let re = 0;
  let im = 0;
  for (let n = 0; n < 120; n++) {
    const t = term / (2 * n + 1);
    if (n % 2 === 0) re += n % 4 === 0 ? t : -t;
    else im += n % 4 === 1 ? t : -t;
    term *= phase / (n + 1);
  }
  return { re, im };
}

/** Effective length (m) of a uniform grating whose |φ|² has this full width at half maximum in Δβ (1/m). */
export function effectiveLength(widthDeltaBeta: number): number {
  need(widthDeltaBeta > 0, "width", widthDeltaBeta, "> 0");
  return SINC_SQUARED_WIDTH / widthDeltaBeta;
}
