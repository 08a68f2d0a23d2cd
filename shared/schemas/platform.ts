// Pure: no I/O, no clock, no hidden randomness.
import { z } from "zod";

/** A value with its standard uncertainty; a plain number means u = 0. */
const uncertain = z.union([
  z.number(),
  z.strictObject({
    value: z.number(),
    u: z.number().min(0).default(0),
    at_nm: z.number().positive().optional(),
  }),
]);

/** One default for both polarisations, or one per polarisation. */
const perPolarisation = z.union([
  uncertain,
  z.strictObject({ TE: uncertain.optional(), TM: uncertain.optional() }),
]);

/** One target for both polarisations, or one per polarisation. */
const aim = z.union([
  z.number().min(0),
  z.strictObject({ TE: z.number().min(0).optional(), TM: z.number().min(0).optional() }),
]);

const spread = z.strictObject({
  lot_sd: z.number().min(0),
  wafer_sd: z.number().min(0),
  die_sd: z.number().min(0),
  guide_sd: z.number().min(0),
});

const axis = z.enum(["x", "y", "z", "o", "e"]);

const rising = z.tuple([z.number(), z.number()]).refine(([low, high]) => low < high, "need [low, high]");

/** What every profile needs whose modes are solved. */
const solved = {
  from: z.literal("solver"),
  /** Index above the surface. */
  cover: z.number().min(1).default(1),
  /** `semi-vectorial`: E across the surface solved with its jump and the crystal's anisotropy. */
  field: z.enum(["scalar", "semi-vectorial"]),
  /** Vacuum wavelengths and temperatures that the tables of modes cover. */
  wavelength_nm: rising.refine(([low]) => low > 0, "need wavelengths above 0"),
  temperature_c: rising,
  provenance: z.string().min(1).optional(),
};

/**
 * Titanium diffused into the crystal: lengths as measured, or estimated from time and temperature. Beside lengths, time
 * and temperature say at what these were found: what a change of either does is told by the sensitivities.
 */
const titaniumDiffused = z.strictObject({
  ...solved,
  profile: z.literal("titanium-diffused"),
  diffusion_lateral_um: z.number().positive().optional(),
  diffusion_depth_um: z.number().positive().optional(),
  diffusion: z.strictObject({ hours: z.number().positive(), temperature_c: z.number() }).optional(),
  /** Geometry of a guide that does not state its own. */
  nominal: z.strictObject({ titanium_nm: z.number().positive() }),
  /** How far from a drawn width and the nominal strip the tables go. */
  span: z.strictObject({ width_um: z.number().positive(), titanium_nm: z.number().positive() }),
}).refine(
  ({ diffusion_lateral_um: lateral, diffusion_depth_um: depth, diffusion }) =>
    (lateral === undefined) === (depth === undefined) && (lateral !== undefined || diffusion !== undefined),
  "need diffusion_lateral_um and diffusion_depth_um, or diffusion in their place",
);

/** Rubidium exchanged into KTP: a box sideways, a complementary error function in depth. */
const rubidiumExchanged = z.strictObject({
  ...solved,
  profile: z.literal("rubidium-exchanged"),
  exchange_depth_um: z.number().positive(),
  /** Index step at the surface, at all wavelengths. */
  index_step: z.strictObject({ TE: z.number().positive(), TM: z.number().positive() }),
  span: z.strictObject({ width_um: z.number().positive() }),
});

/** Traits that a platform may give a default (and prior spreads) for. */
export const DEFAULT_TRAITS = [
  "loss_db_cm",
  "mfd_x_um",
  "mfd_y_um",
  "duty",
  "duty_sd",
  "merged",
  "coated_reflectivity",
  "width_error_um",
  "film_thickness_nm",
  "etch_depth_nm",
  "titanium_nm",
  "mismatch_offset_per_m",
  "mismatch_sd_per_m",
] as const;
export type DefaultTrait = typeof DEFAULT_TRAITS[number];

const processKey = z.string().regex(
  /^(TE|TM)>(TE|TM)\+(TE|TM)$/,
  'need pump>signal+idler with TE or TM, such as "TE>TE+TM"',
);

/** `<id>.json`: a fabrication platform (formats: "Platforms"). */
export const platformSchema = z.strictObject({
  $schema: z.string().optional(),
  platform: z.string().min(1),
  material: z.enum(["KTP", "CLN", "MgO:CLN"]),
  axes: z.strictObject({ TE: axis, TM: axis }),
  index: z.discriminatedUnion("from", [
    z.strictObject({ from: z.literal("bulk") }),
    z.strictObject({
      from: z.literal("table"),
      n_eff: z.string().min(1),
      effective_area: z.string().min(1).optional(),
      /** What the guides stand on (`crystal`: they are diffused into it); with it n_eff is checked to lie above it. */
      substrate: z.union([z.enum(["silica", "crystal"]), z.number().min(1)]).optional(),
      /** Geometry of a guide that does not state its own. */
      nominal: z.strictObject({
        film_thickness_nm: z.number().positive().optional(),
        etch_depth_nm: z.number().positive().optional(),
        titanium_nm: z.number().positive().optional(),
      }).optional(),
      provenance: z.string().min(1).optional(),
    }),
    z.discriminatedUnion("profile", [titaniumDiffused, rubidiumExchanged]),
  ]),
  effective_area_um2: z.number().positive().optional(),
  outside_index: z.number().min(1).optional(),
  nonlinear: z.record(
    processKey,
    z.strictObject({
      d_pm_per_v: z.number().refine((d) => d !== 0, "need a coefficient other than 0"),
      at_nm: z.number().positive(),
    }),
  ),
  defaults: z.strictObject({
    loss_db_cm: perPolarisation.optional(),
    mfd_x_um: perPolarisation.optional(),
    mfd_y_um: perPolarisation.optional(),
    duty: uncertain.optional(),
    duty_sd: uncertain.optional(),
    merged: uncertain.optional(),
    coated_reflectivity: perPolarisation.optional(),
    /** Width as made less width as drawn. */
    width_error_um: uncertain.optional(),
    film_thickness_nm: uncertain.optional(),
    etch_depth_nm: uncertain.optional(),
    titanium_nm: uncertain.optional(),
    /** How far the calculated Δβ may be off, 1/m; with it, scans speak for the guides near them, too. */
    mismatch_offset_per_m: uncertain.optional(),
    /** Standard deviation of Δβ along a guide at a correlation length of 1 mm, 1/m; with it, scans speak for the guides near them, too. */
    mismatch_sd_per_m: uncertain.optional(),
    u_insertion_loss_db: z.number().min(0).optional(),
    u_contrast: z.number().min(0).optional(),
    u_reflectivity: z.number().min(0).optional(),
    u_mfd_um: z.number().min(0).optional(),
    u_value: z.record(z.string(), z.number().min(0)).optional(),
  }).default({}),
  /** What a fabrication aims at, where that is not the default; mode sizes at the default's wavelength. */
  targets: z.strictObject({
    loss_db_cm: aim.optional(),
    mfd_x_um: aim.optional(),
    mfd_y_um: aim.optional(),
    duty: z.number().gt(0).lt(1).optional(),
    duty_sd: z.number().min(0).optional(),
    merged: z.number().min(0).max(1).optional(),
    coated_reflectivity: aim.optional(),
    width_error_um: z.number().optional(),
    film_thickness_nm: z.number().positive().optional(),
    etch_depth_nm: z.number().positive().optional(),
    titanium_nm: z.number().positive().optional(),
    mismatch_offset_per_m: z.number().optional(),
  }).default({}),
  priors: z.partialRecord(z.enum(DEFAULT_TRAITS), spread).default({}),
  notes: z.object({
    pump_limit_mw: z.number().positive().optional(),
    caution: z.string().optional(),
  }).catchall(z.unknown()).default({}),
});
export type Platform = z.infer<typeof platformSchema>;
export type SolverIndex = Extract<Platform["index"], { from: "solver" }>;

/** A row of `<id>.n_eff.csv`. */
export const indexRowSchema = z.strictObject({
  wavelength_nm: z.number().positive(),
  polarisation: z.enum(["TE", "TM"]),
  temperature_c: z.number(),
  width_um: z.number().positive(),
  film_thickness_nm: z.number().positive().optional(),
  etch_depth_nm: z.number().positive().optional(),
  titanium_nm: z.number().positive().optional(),
  n_eff: z.number().min(1),
});

/** A row of `<id>.effective_area.csv`. */
export const areaRowSchema = z.strictObject({
  process: processKey,
  width_um: z.number().positive(),
  film_thickness_nm: z.number().positive().optional(),
  etch_depth_nm: z.number().positive().optional(),
  titanium_nm: z.number().positive().optional(),
  effective_area_um2: z.number().positive(),
});
