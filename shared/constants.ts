// Pure: no I/O, no clock, no hidden randomness.

/** Speed of light in vacuum, m/s (exact, SI Brochure, 9th edition, 2019). */
export const SPEED_OF_LIGHT = 299_792_458;

/** Vacuum electric permittivity, F/m (CODATA 2018: 8.8541878128(13)e-12). */
export const VACUUM_PERMITTIVITY = 8.854_187_812_8e-12;

/** Temperature at which lengths, periods and wall positions of files hold, °C. */
export const REFERENCE_TEMPERATURE_C = 25;
