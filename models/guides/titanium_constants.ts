// Pure: no I/O, no clock, no hidden randomness.
// Every constant of titanium in-diffusion that has its number FROM MEMORY, in one place. As physics the law is good to
// about 15 %: a laboratory's own mode sizes and phase matching say more about its process than these numbers do.

/** Titanium atoms per volume of the deposited film, 1/cm³ (density of the metal). */
export const FILM_DENSITY = 5.67e22;

/**
 * Index increase against concentration c (1/cm³) and wavelength L (µm): strength·L²/(L² − resonance)·(unit·c)^power.
 * E. Strake, G. P. Bava & I. Montrosset, J. Lightwave Technol. 6, 1126 (1988); constants from memory.
 */
export const INCREASE = {
  extraordinary: { strength: 0.839, resonance: 0.0645, unit: 1.2e-23, power: 1 },
  ordinary: { strength: 0.67, resonance: 0.13, unit: 1.3e-25, power: 0.55 },
} as const;

/** Where the law was fitted: wavelength in µm, surface concentration up to (1/cm³). From memory. */
export const INCREASE_RANGE = { lambda_um: [0.6, 1.6], highestConcentration: 1.6e21 } as const;

/**
 * Diffusivity D = factor·exp(−activation/T), T in K, D in µm²/h, of titanium in congruent LiNbO3; taken equal sideways
 * and in depth. From memory, of the order of published values; these scatter by tens of per cent in the diffusion
 * length with stoichiometry, cut and atmosphere. Known lengths should always be given instead.
 */
export const DIFFUSIVITY = { factor_um2_h: 1.35e8, activation_k: 2.5e4, published_c: [950, 1100] } as const;
