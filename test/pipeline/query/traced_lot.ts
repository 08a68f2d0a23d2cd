// A small lot with a reading of every kind, predicted for a pair source and a doubler; for the tests of tracing.
import { join } from "node:path";
import { openLedger } from "../../../pipeline/ledger/mod.ts";
import { predictLot } from "../../../pipeline/predict/predict_lot.ts";
import { reduceLot } from "../../../pipeline/reduce/reduce_lot.ts";
import { loadRequests } from "../../../pipeline/requests.ts";
import { Scene } from "../ingest/folder.ts";

const GUIDES = [
  "wafer,die,x_mm,y_mm,guide,group,width_um,period_um,length_mm,poled_from_mm,poled_length_mm",
  ...["05", "06", "07"].flatMap((die) => [1, 2].map((g) => `K07-1,${die},1,2,g0${g},A,4,46.05,8,0.5,7`)),
  "K07-1,07,1,2,g03,A,4,9.1,8,0.5,7", // no temperature brings this one into phase
  "",
].join("\n");

export const CUTBACK = [
  "wafer,die,guide,wavelength_nm,polarisation,length_mm,insertion_loss_db,u_insertion_loss_db",
  "K07-1,05,g01,1582,TE,8,2.9,0.01",
  "K07-1,05,g01,1582,TE,6,2.81,0.01",
  "K07-1,05,g01,1582,TE,4,2.7,",
  "K07-1,05,g02,1582,TE,8,2.95,0.01",
  "K07-1,05,g02,1582,TE,4,2.75,0.01",
  "",
].join("\n");

/** Walls of 06/g01, µm: half a period apart over the poled section. */
export const WALLS = Array.from({ length: 304 }, (_, k) => Number((500 + 46.05 * (k / 2 + 0.25)).toFixed(3)));

/** A tuning curve about 40 °C; the first lines of the file are a preamble. */
const SCAN = Array.from({ length: 61 }, (_, k) => {
  const x = 2.8 * (k - 30) / 12;
  const power = x === 0 ? 1 : (Math.sin(x) / x) ** 2;
  return `K07-1,06,g02,a,second-harmonic,TE+TM>TE,${(25 + k).toFixed(1)},1582,${power.toFixed(6)}`;
});

const FILES: Record<string, string | object> = {
  "lot.json": {
    lot: "K07",
    platform: "bulk-ktp",
    wafers: [{ wafer: "K07-1", substrate_batch: "S-4" }],
    steps: [
      { wafer: "K07-1", order: 2, step: "poling", tool: "bench-1", settings: { voltage_v: 900 } },
      { wafer: "K07-1", order: 1, step: "cleaning", recipe: "R2", finished: "2026-02-03T10:00:00Z" },
    ],
    coatings: [
      { coating_run: "C1", facet: "out", dies: ["K07-1/05", "K07-1/06"] },
      { coating_run: "C2", facet: "out", dies: ["K07-1/05"] },
      { coating_run: "C3", facet: "out", dies: ["K07-1/06"] },
    ],
  },
  "guides.csv": GUIDES,
  "readings/cutback.csv": CUTBACK,
  "readings/facets.csv":
    "coating_run,facet,wavelength_nm,reflectivity,u_reflectivity\nC2,out,1582,0.004,\nC3,out,1535,0.006,\nC3,out,1545,0.004,\n",
  // 06/g02 is read between its coated output facet (C3 replaces C1) and its bare input facet.
  "readings/fringes.csv": "wafer,die,guide,wavelength_nm,polarisation,contrast,u_contrast,facet_state\n" +
    "K07-1,06,g02,1540,TM,0.03,0.0002,coated\n",
  "readings/modes.csv": "wafer,die,guide,wavelength_nm,polarisation,mfd_x_um,mfd_y_um\n" +
    "K07-1,05,g01,1550,TE,8.1,6.2\n",
  "readings/poling.csv":
    "wafer,die,guide,window_start_mm,window_length_mm,domains,duty_mean,duty_sd,merged\n" +
    "K07-1,05,g01,2,1,21,0.47,0.02,1\n",
  "readings/walls.csv": "wafer,die,guide,position_um\n" +
    WALLS.map((z) => `K07-1,06,g01,${z}\n`).join(""),
  "readings/tuning.csv": [
    "wafer,die,guide,scan,process,polarisations,temperature_c,wavelength_nm,power_rel",
    ...SCAN,
    "",
  ].join("\n"),
};

const arm = { wavelength_nm: 1582, fibre_mfd_um: 10.4, detector: { efficiency: 0.85, dark_hz: 100 } };
const POLARISATIONS = { pump: "TE", signal: "TE", idler: "TM" };

export const REQUESTS = {
  pairs: {
    request: "pairs",
    process: "pair-generation",
    polarisations: POLARISATIONS,
    pump: { wavelength_nm: 791, fwhm_ps: 1, average_power_mw: 0.1, repetition_mhz: 76 },
    signal: arm,
    idler: arm,
    oven_c: [20, 90],
    require: [{ figure: "heralding_signal", at_least: 0.3 }],
  },
  double: {
    request: "double",
    process: "second-harmonic",
    polarisations: POLARISATIONS,
    signal: { wavelength_nm: 1582, average_power_mw: 20 },
    oven_c: [20, 90],
  },
};

/** The run folder with its requests in a folder of its own; `scene.root` holds both. */
export async function tracedScene(requests: readonly (keyof typeof REQUESTS)[] = ["pairs", "double"]) {
  const scene = await Scene.make(FILES);
  const folder = join(scene.root, "requests");
  await Deno.mkdir(folder);
  for (const name of requests) {
    await Deno.writeTextFile(join(folder, `${name}.json`), JSON.stringify(REQUESTS[name]));
  }
  return { scene, requests: folder };
}

/** Takes the run folder in and predicts; calls `use` with the ledger opened for reading. */
export async function withTracedLot(
  use: (lot: {
    readonly ledger: Awaited<ReturnType<typeof openLedger>>;
    readonly scene: Scene;
    readonly requests: string;
  }) => Promise<void>,
  options: { readonly requests?: readonly (keyof typeof REQUESTS)[]; readonly platforms?: string } = {},
): Promise<void> {
  const { scene, requests } = await tracedScene(options.requests);
  await using _ = scene;
  await scene.ingest();
  const writing = await scene.ledger();
  await reduceLot(writing, "K07", options.platforms);
  await predictLot(writing, "K07", await loadRequests(requests), {
    workers: 1,
    ...(options.platforms === undefined ? {} : { platforms: options.platforms }),
  });
  await using ledger = await openLedger(writing.directory, { write: false });
  await use({ ledger, scene, requests });
}
