// A small lot of an invented facility, and the requests that the tests ask of it. Small u everywhere: the mean of the
// draws is then the value that a calculation without draws gives.
import { dirname, join } from "node:path";

export const LOT = "Z09";

/**
 * Guides of the lot as designed; lengths mm, period µm. The poled lengths are whole periods and less than ¾ of one more:
 * however a last domain is counted that does not fit, there is none.
 */
export const DESIGN = {
  "Z09-1/01/g1": { period: 46.05, length: 8, from: 0.5, poled: 7 },
  "Z09-1/01/g2": { period: 46.04, length: 8, from: 0.5, poled: 7 },
  "Z09-1/02/g1": { period: 46.03, length: 8, from: 0.5, poled: 7 },
  "Z09-1/02/g2": { period: 46.05, length: 8, from: 1.0, poled: 6 },
  "Z09-1/02/g10": { period: 46.9, length: 8, from: 0.5, poled: 7 },
  "Z09-1/03/g1": { period: 46.05, length: 8, from: 0.5, poled: 7 },
  "Z09-1/03/g2": { period: 46.05, length: 8, from: 0.5, poled: 7 },
} as const;
export type GuideId = keyof typeof DESIGN;
export const GUIDE_IDS = Object.keys(DESIGN) as GuideId[];

/** Walls of 01/g1, µm: stretched against the mask by 2e-4, each off by up to 0.8 µm in a pattern of its own. */
export const WALLS_UM: readonly number[] = Array.from({ length: 304 }, (_, j) => {
  const wander = 0.5 * Math.sin(0.7 * j) + 0.3 * Math.sin(2.13 * j * j);
  return Number((500 + 46.05 * 1.0002 * (j / 2 + 0.24) + wander).toFixed(3));
});

/** True loss of guides, dB/cm, as fringes or cut-backs of this lot show it. */
export const LOSS = {
  "Z09-1/01/g1": { pump: 0.61, TE: 0.42, TM: 0.53 },
  "Z09-1/01/g2": { pump: 0.72, TE: 0.35, TM: 0.48 },
  "Z09-1/02/g1": { pump: 0.55, TE: 0.29, TM: 0.37 },
  "Z09-1/02/g2": { pump: 0.66, TE: 0.81, TM: 0.74 },
  "Z09-1/02/g10": { pump: 0.58, TE: 0.44, TM: 0.51 },
} as const;

/** Poling windows: [guide, start, length, domains, duty, merged]. */
export const WINDOWS = [
  ["Z09-1/01/g2", 0.5, 1.0, 21, 0.44, 0],
  ["Z09-1/01/g2", 6.0, 1.0, 21, 0.53, 0],
  ["Z09-1/02/g1", 3.0, 1.0, 21, 0.47, 0],
  ["Z09-1/02/g2", 2.0, 1.0, 21, 0.42, 0],
  ["Z09-1/02/g10", 2.0, 1.0, 21, 0.5, 0],
  ["Z09-1/03/g1", 2.0, 1.0, 21, 0.5, 0],
  ["Z09-1/03/g2", 2.0, 1.0, 21, 0.5, 0],
] as const;

/** Mode sizes: [guide, λ nm, polarisation, x, y µm]. Those at 1550 nm have to be carried to the request's wavelength. */
export const MODES = [
  ["Z09-1/01/g1", 1550, "TE", 7.1, 5.9],
  ["Z09-1/01/g1", 1550, "TM", 7.4, 6.3],
  ["Z09-1/01/g2", 1582, "TE", 8.4, 6.1],
  ["Z09-1/01/g2", 1582, "TM", 7.9, 6.6],
  ["Z09-1/02/g1", 1582, "TE", 8.8, 7.1],
  ["Z09-1/02/g1", 1582, "TM", 9.3, 7.7],
  ["Z09-1/02/g2", 1582, "TE", 8.1, 6.0],
  ["Z09-1/02/g2", 1582, "TM", 8.2, 5.8],
] as const;

/** Witness of the coating run on the output facet of die 02: [λ nm, R]. A second run has no spectrum near 1582 nm. */
export const COATING = [[1570, 0.012], [1590, 0.004], [1640, 0.2]] as const;

/** Contrast that a guide of known loss shows between two facets of reflectivity R. */
export const contrastOf = (R: number, lossDbCm: number, lengthMm: number): number => {
  const r = R * 10 ** (-lossDbCm * lengthMm / 100);
  return 2 * r / (1 + r * r);
};

const idCells = (id: string) => id.replaceAll("/", ",");

export function lotJson(): Record<string, unknown> {
  return {
    lot: LOT,
    platform: "bulk-ktp",
    started: "2026-02-03",
    wafers: [{ wafer: "Z09-1", diameter_mm: 50.8 }],
    steps: [{ wafer: "Z09-1", order: 1, step: "poling", tool: "bench-1", recipe: "P4" }],
    coatings: [
      { coating_run: "C0", facet: "out", dies: ["Z09-1/02"] },
      { coating_run: "C1", facet: "out", dies: ["Z09-1/02"] },
      { coating_run: "C2", facet: "out", dies: ["Z09-1/03"] },
    ],
    columns: {
      cutback: { "IL (dB)": "insertion_loss_db", "len [cm]": { to: "length_mm", times: 10 } },
      modes: { "MFD x": "mfd_x_um", "MFD y": "mfd_y_um" },
    },
  };
}

/**
 * Files of the run folder, by relative path.
 * @param bare reflectivity of a bare facet by wavelength (nm) and polarisation at 25 °C: a reading of contrast needs it
 */
export function runFiles(bare: (nm: number, pol: "TE" | "TM") => number): Record<string, string> {
  const guides = GUIDE_IDS.map((id) => {
    const [wafer, die, guide] = id.split("/");
    const g = DESIGN[id];
    return `${wafer},${die},${Number(die)},0,${guide},A,4,${g.period},${g.length},${g.from},${g.poled}`;
  });
  const fringes = Object.entries(LOSS).flatMap(([id, loss]) =>
    ([[791, "TE", loss.pump], [1582, "TE", loss.TE], [1582, "TM", loss.TM]] as const).map(([nm, pol, db]) =>
      `${idCells(id)},${nm},${pol},${contrastOf(bare(nm, pol), db, 8)},0.00001,bare`
    )
  );
  const cut = ([[791, "TE", 0.7], [1582, "TE", 0.45], [1582, "TM", 0.6]] as const).flatMap((
    [nm, pol, slope],
  ) => [0.8, 0.6, 0.4].map((cm) => `Z09-1,03,g1,${nm},${pol},${cm},${2.5 + slope * cm},0.001`));
  return {
    "lot.json": JSON.stringify(lotJson(), null, 2),
    "guides.csv": lines(
      "wafer,die,x_mm,y_mm,guide,group,width_um,period_um,length_mm,poled_from_mm,poled_length_mm",
      guides,
    ),
    "readings/cutback.csv": lines(
      "wafer,die,guide,wavelength_nm,polarisation,len [cm],IL (dB),u_insertion_loss_db",
      [...cut, "Z09-1,03,g1,1582,TE,0.8,NaN,0.001", "Z09-1,3,g1,1582,TE,0.8,2.9,0.001"],
    ),
    "readings/fringes.csv": lines(
      "wafer,die,guide,wavelength_nm,polarisation,contrast,u_contrast,facet_state",
      [...fringes, "Z09-1,01,g1,1582,TE,0.9,0.00001,bare", "Z09-1,01,g7,1582,TE,0.1,0.00001,bare"],
    ),
    "readings/poling.csv": lines(
      "wafer,die,guide,window_start_mm,window_length_mm,domains,duty_mean,duty_sd,merged",
      WINDOWS.map(([id, z, l, n, duty, merged]) => `${idCells(id)},${z},${l},${n},${duty},0,${merged}`),
    ),
    "readings/walls.csv": lines("wafer,die,guide,position_um", [
      ...WALLS_UM.map((z) => `Z09-1,01,g1,${z}`),
      // One wall of the other guide lies outside it: the list is not the whole list, and is not used as one.
      ...WALLS_UM.slice(0, 40).map((z) => `Z09-1,02,g1,${z}`),
      "Z09-1,02,g1,9000",
    ]),
    "readings/modes.csv": lines("wafer,die,guide,wavelength_nm,polarisation,MFD x,MFD y,u_mfd_um", [
      ...MODES.map(([id, nm, pol, x, y]) => `${idCells(id)},${nm},${pol},${x},${y},0.002`),
    ]),
    "readings/facets.csv": lines("coating_run,facet,wavelength_nm,reflectivity,u_reflectivity", [
      ...COATING.map(([nm, r]) => `C1,out,${nm},${r},0.00001`),
      "C0,out,1582,0.5,0.00001",
      "C2,out,1480,0.02,0.00001",
    ]),
  };
}

const lines = (head: string, rows: readonly string[]): string => [head, ...rows, ""].join("\n");

/** Accepted and quarantined rows of the run folder's files. */
export const COUNTS: Readonly<Record<string, readonly [accepted: number, quarantined: number]>> = {
  "guides.csv": [7, 0],
  "readings/cutback.csv": [9, 2],
  "readings/fringes.csv": [16, 1],
  "readings/poling.csv": [7, 0],
  "readings/walls.csv": [344, 1],
  "readings/modes.csv": [8, 0],
  "readings/facets.csv": [5, 0],
};

const arm = { wavelength_nm: 1582, fibre_mfd_um: 10.4, detector: { efficiency: 0.85, dark_hz: 100 } };
const pairs = (request: string, gdd: number, filters: { signal?: object; idler?: object }, fwhm = 1) => ({
  request,
  process: "pair-generation",
  polarisations: { pump: "TE", signal: "TE", idler: "TM" },
  pump: {
    wavelength_nm: 791,
    fwhm_ps: fwhm,
    gdd_fs2: gdd,
    average_power_mw: 0.1,
    repetition_mhz: 76,
  },
  signal: { ...arm, ...(filters.signal === undefined ? {} : { filter: filters.signal }) },
  idler: { ...arm, ...(filters.idler === undefined ? {} : { filter: filters.idler }) },
  oven_c: [20, 90],
  require: [{ figure: "heralding_signal", at_least: 0.4 }, { figure: "purity", at_least: 0.3 }],
});
export const FLAT = { shape: "flat-top", fwhm_nm: 12, peak: 0.97 };
export const GAUSS = { shape: "gaussian", fwhm_nm: 6, peak: 0.92 };

/** Requests of the folder, by name. */
export const REQUESTS = {
  open: pairs("open", 0, {}),
  filtered: pairs("filtered", 0, { signal: FLAT, idler: GAUSS }),
  "chirp-up": pairs("chirp-up", 3e5, { signal: FLAT, idler: GAUSS }),
  "chirp-down": pairs("chirp-down", -3e5, { signal: FLAT, idler: GAUSS }),
  "chirp-strong": pairs("chirp-strong", 1.5e6, { signal: FLAT, idler: FLAT }),
  double: {
    request: "double",
    process: "second-harmonic",
    polarisations: { pump: "TE", signal: "TE", idler: "TM" },
    signal: { wavelength_nm: 1582, average_power_mw: 20 },
    oven_c: [20, 90],
    require: [{ figure: "efficiency_percent_per_w", at_least: 0.5 }],
    order_by: "efficiency_percent_per_w",
  },
  sum: {
    request: "sum",
    process: "sum-frequency",
    polarisations: { pump: "TE", signal: "TE", idler: "TM" },
    signal: { wavelength_nm: 1581, average_power_mw: 100 },
    idler: { wavelength_nm: 1583.1 },
    oven_c: [20, 90],
  },
} as const;

/** Writes texts (or bytes) below a folder. */
export async function writeFiles(
  folder: string,
  files: Readonly<Record<string, string | Uint8Array>>,
): Promise<void> {
  for (const [name, content] of Object.entries(files)) {
    const path = join(folder, name);
    await Deno.mkdir(dirname(path), { recursive: true });
    if (typeof content === "string") await Deno.writeTextFile(path, content);
    else await Deno.writeFile(path, content);
  }
}

/** Writes requests, each into a file of its name. */
export async function writeRequests(
  folder: string,
  requests: Readonly<Record<string, object>> = REQUESTS,
): Promise<void> {
  await writeFiles(
    folder,
    Object.fromEntries(Object.entries(requests).map(([name, r]) => [`${name}.json`, JSON.stringify(r)])),
  );
}
