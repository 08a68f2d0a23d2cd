// Pure: no I/O, no clock, no hidden randomness.
// One zod object per kind of reading: the values of a row after its cells became numbers or text. `null` is an empty
// cell. A field's description says what would be right, and goes into messages and the JSON Schema.
import { z } from "zod";
import { FIGURES } from "./figures.ts";
import { idSchema, momentSchema } from "./ids.ts";

/** Kinds of reading, in the order of output. */
export const READING_KINDS = [
  "cutback",
  "fringes",
  "poling",
  "walls",
  "facets",
  "modes",
  "geometry",
  "tuning",
  "outcomes",
] as const;
export type ReadingKind = typeof READING_KINDS[number];

export const GEOMETRY_QUANTITIES = ["width_um", "film_thickness_nm", "etch_depth_nm", "titanium_nm"] as const;

const between = (low: number, high: number) =>
  z.number().min(low).max(high).describe(`a number ${low}…${high}`);
const notNegative = z.number().min(0).describe("a number, 0 or more");
const positive = z.number().gt(0).describe("a number above 0");
const anyNumber = z.number().describe("a number");
const count = z.number().int().min(0).max(1e9).describe("a whole number, 0 or more");
const wavelength = between(200, 20_000).describe("a vacuum wavelength of 200…20000 nm");
const polarisation = z.enum(["TE", "TM"]).describe("TE or TM");
const uncertainty = notNegative.nullish().describe("a standard uncertainty (k = 1), 0 or more, or empty");

/** Who and when: known for every kind, never required. */
const provenance = {
  measured_at: momentSchema.nullish(),
  instrument: z.string().max(200).nullish().describe("text"),
};

/** Empty `guide`: the reading belongs to the whole die; empty `die` too: to the wafer. The columns have to be there. */
const place = { wafer: idSchema, die: idSchema.nullable(), guide: idSchema.nullable() };

export const READING_SCHEMAS = {
  cutback: z.strictObject({
    ...place,
    wavelength_nm: wavelength,
    polarisation,
    length_mm: positive,
    insertion_loss_db: between(0, 300).describe("a loss of 0…300 dB (positive: what is lost)"),
    u_insertion_loss_db: uncertainty,
    ...provenance,
  }),
  fringes: z.strictObject({
    ...place,
    wavelength_nm: wavelength,
    polarisation,
    contrast: between(0, 1),
    u_contrast: uncertainty,
    facet_state: z.enum(["bare", "coated"]).describe("bare or coated"),
    ...provenance,
  }),
  poling: z.strictObject({
    ...place,
    window_start_mm: notNegative,
    window_length_mm: positive,
    domains: count,
    duty_mean: between(0, 1),
    duty_sd: between(0, 1),
    merged: count,
    ...provenance,
  }),
  walls: z.strictObject({
    wafer: idSchema,
    die: idSchema,
    guide: idSchema,
    position_um: positive,
    ...provenance,
  }),
  facets: z.strictObject({
    coating_run: idSchema,
    facet: z.enum(["in", "out"]).describe("in or out"),
    wavelength_nm: wavelength,
    reflectivity: between(0, 1),
    u_reflectivity: uncertainty,
    ...provenance,
  }),
  modes: z.strictObject({
    ...place,
    wavelength_nm: wavelength,
    polarisation,
    mfd_x_um: positive,
    mfd_y_um: positive,
    u_mfd_um: uncertainty,
    ...provenance,
  }),
  geometry: z.strictObject({
    ...place,
    z_mm: notNegative.nullable().describe(
      "a position from the input facet, 0 mm or more, or empty for the whole guide",
    ),
    quantity: z.enum(GEOMETRY_QUANTITIES).describe(GEOMETRY_QUANTITIES.join(", ")),
    value: positive,
    u_value: uncertainty,
    ...provenance,
  }),
  tuning: z.strictObject({
    ...place,
    scan: idSchema,
    process: z.enum(["second-harmonic"]).describe("second-harmonic"),
    polarisations: z.string().regex(/^T[EM]\+T[EM]>T[EM]$/).describe(
      "input+input>output with TE or TM, such as TE+TM>TE",
    ),
    temperature_c: between(-273.15, 2000).describe("a temperature of -273.15…2000 °C"),
    wavelength_nm: wavelength,
    power_rel: anyNumber,
    ...provenance,
  }),
  outcomes: z.strictObject({
    ...place,
    request: idSchema,
    figure: z.enum(FIGURES).describe("the name of a figure, such as efficiency_percent_per_w"),
    value: anyNumber,
    u_value: uncertainty,
    ...provenance,
  }),
} as const satisfies Record<ReadingKind, z.ZodObject>;

/** A row of a kind, checked. */
export type ReadingRow<K extends ReadingKind> = z.infer<typeof READING_SCHEMAS[K]>;

/**
 * The kind that a reading file's stem names: `cutback`, or `cutback-` and anything after it. Null when it names none.
 */
export function kindOfStem(stem: string): ReadingKind | null {
  const first = stem.split("-", 1)[0]!;
  return (READING_KINDS as readonly string[]).includes(first) ? first as ReadingKind : null;
}

/** JSON Schema of one row of a kind, for editors and other programs. */
export const readingJsonSchema = (kind: ReadingKind): Record<string, unknown> =>
  z.toJSONSchema(READING_SCHEMAS[kind], { io: "input" }) as Record<string, unknown>;
