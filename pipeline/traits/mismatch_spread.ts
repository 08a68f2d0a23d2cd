/** Correlation length (m) at which a spread of δβ is stated; a spread means nothing without one. */
export const CORRELATION_LENGTH = 1e-3;
