// Pure: no I/O, no clock, no hidden randomness.
// What of rubidium exchange has its number FROM MEMORY, in one place; and what the law leaves out.

/**
 * Index steps at the surface that are usual of rubidium-exchanged KTP, both polarisations; from memory. The step is taken
 * the same at all wavelengths, and the depth the same for all widths: that narrower guides come out deeper has been
 * measured (L. Padberg et al., "Evidence of nonlinear diffusion in KTP waveguides", arXiv:2006.12214 (2020)).
 */
export const USUAL_STEP = [0.01, 0.02] as const;
