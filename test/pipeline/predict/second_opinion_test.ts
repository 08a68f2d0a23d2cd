// The main job against a calculation of its own (test/second_opinion.ts): published formulas, plain sums, no code of
// models/. What is compared is what a user gets: the JSON of `rank`.
import { deepEqual, equal, ok } from "node:assert/strict";
import { join } from "node:path";
import { assertClose } from "../../assert_close.ts";
import type { Ranking } from "../../../pipeline/query/rank.ts";
import * as lot from "../../run_folder.ts";
import { wavelot } from "../../run_wavelot.ts";
import * as second from "../../second_opinion.ts";

const { KTP } = second;
const OVEN = [20, 90] as const;
const waves = (p: number, s: number, i: number): second.Waves => ({
  p: p * 1e-9,
  s: s * 1e-9,
  i: i * 1e-9,
  pol: { p: "TE", s: "TE", i: "TM" },
});
const PAIRS = waves(791, 1582, 1582);
const SUM = waves(1 / (1 / 1581 + 1 / 1583.1), 1581, 1583.1);
/** Crystal coefficient and area of the built-in bulk-ktp. */
const D24 = { d: 3.92e-12, at: 1064e-9, area: 40e-12 };
const bare = (nm: number, pol: second.Pol) => second.fresnel(second.index(KTP, pol, nm * 1e-9, 25));

/** Guides whose traits are all read on the guide itself or are exact. */
const READ = ["Z09-1/01/g1", "Z09-1/01/g2", "Z09-1/02/g1", "Z09-1/02/g2"] as const;
type Read = typeof READ[number];

function domainsOf(id: lot.GuideId): second.Domains {
  const { period, from, poled } = lot.DESIGN[id];
  if (id === "Z09-1/01/g1") return second.domainsFromWalls(lot.WALLS_UM, from, poled);
  const windows = lot.WINDOWS.filter((w) => w[0] === id).map((w) => [w[1] + w[2] / 2, w[4]] as const);
  return second.domainsFromDuty(windows, period, from, poled);
}

const temperatureOf = (id: lot.GuideId, w: second.Waves): number | null =>
  id === "Z09-1/01/g1"
    ? second.peakTemperature(KTP, w, domainsOf(id), OVEN)
    : second.rootTemperature(KTP, w, lot.DESIGN[id].period, OVEN);

const alphas = (id: Read) => ({
  p: second.attenuation(lot.LOSS[id].pump),
  s: second.attenuation(lot.LOSS[id].TE),
  i: second.attenuation(lot.LOSS[id].TM),
});

function survivalOf(id: Read, T: number, arm: "TE" | "TM"): number {
  const { length, from, poled } = lot.DESIGN[id];
  const mm = 1e-3 * KTP.stretch(T);
  const { p, s, i } = alphas(id);
  const [own, other] = arm === "TE" ? [s, i] : [i, s];
  return second.survival({ pump: p, own, other }, length * mm, from * mm, (from + poled) * mm);
}

function couplingOf(id: Read, arm: "TE" | "TM"): number {
  const [, nm, , x, y] = lot.MODES.find((m) => m[0] === id && m[2] === arm)!;
  return second.gaussianOverlap(x * 1582 / nm, y * 1582 / nm, 10.4);
}

/** Die 01 is bare; the coating of die 02 goes linearly from 1570 to 1590 nm. */
function facetOf(id: Read, T: number, arm: "TE" | "TM"): number {
  if (id.startsWith("Z09-1/02")) return 1 - (0.012 + 0.6 * (0.004 - 0.012));
  return 1 - second.fresnel(second.index(KTP, arm, 1582e-9, T));
}

const pairCase = (id: Read, T: number, gdd: number, signal: object | null, idler: object | null) => ({
  crystal: KTP,
  waves: PAIRS,
  T,
  domains: domainsOf(id),
  fwhm: 1e-12,
  gdd: gdd * 1e-30,
  pumpLoss: alphas(id).p,
  signal: signal as second.FilterShape | null,
  idler: idler as second.FilterShape | null,
});

async function rankings(): Promise<{ ingest: IngestJson; rank: Record<string, Ranking> }> {
  const root = await Deno.makeTempDir({ prefix: "second-" });
  try {
    await lot.writeFiles(join(root, "Z09"), lot.runFiles(bare));
    await lot.writeRequests(join(root, "requests"));
    const options = ["--ledger", "ledger", "--format", "json"];
    const ingest = await wavelot(["ingest", "Z09", ...options], root);
    equal(ingest.code, 1, ingest.stderr);
    const rank: Record<string, Ranking> = {};
    for (const name of Object.keys(lot.REQUESTS)) {
      const call = await wavelot(["rank", name, "--all-guides", "--requests", "requests", ...options], root);
      equal(call.code, 0, call.stderr);
      rank[name] = JSON.parse(call.stdout);
    }
    return { ingest: JSON.parse(ingest.stdout), rank };
  } finally {
    await Deno.remove(root, { recursive: true });
  }
}
interface IngestJson {
  readonly rows: number;
  readonly accepted: number;
  readonly quarantined: number;
  readonly files: readonly {
    readonly name: string;
    readonly rows: number;
    readonly accepted: number;
    readonly quarantined: number;
  }[];
}

Deno.test("a run folder's predictions are those of an independent calculation", async (t) => {
  const { ingest, rank } = await rankings();
  const guide = (request: keyof typeof lot.REQUESTS, id: string) =>
    rank[request]!.dies.find((d) => d.guide === id)!;
  const mean = (
    request: keyof typeof lot.REQUESTS,
    id: string,
    figure: keyof Ranking["dies"][0]["figures"],
  ) => {
    const { mean, lo, hi, reason } = guide(request, id).figures[figure];
    ok(mean !== null, `${request} ${id} ${figure}: ${reason}`);
    ok(lo! <= mean && mean <= hi!, `${figure} within its quantiles`);
    return mean;
  };

  await t.step("accepted and quarantined rows add up, file by file", () => {
    for (const file of ingest.files) {
      const [accepted, quarantined] = lot.COUNTS[file.name]!;
      deepEqual([file.rows, file.accepted, file.quarantined], [
        accepted + quarantined,
        accepted,
        quarantined,
      ]);
    }
    equal(ingest.files.length, Object.keys(lot.COUNTS).length);
    equal(ingest.accepted + ingest.quarantined, ingest.rows);
  });

  await t.step("operating temperatures", () => {
    for (const [request, w] of [["open", PAIRS], ["double", PAIRS], ["sum", SUM]] as const) {
      for (const id of READ) {
        const expected = temperatureOf(id, w);
        ok(expected !== null);
        assertClose(
          mean(request, id, "operating_temperature_c"),
          expected,
          { abs: 0.01 },
          `${request} ${id}`,
        );
      }
    }
    // The inspected walls are stretched against the mask: the design's root is another temperature.
    const design = second.rootTemperature(KTP, PAIRS, 46.05, OVEN)!;
    ok(Math.abs(mean("open", "Z09-1/01/g1", "operating_temperature_c") - design) > 0.5);
    equal(second.rootTemperature(KTP, PAIRS, lot.DESIGN["Z09-1/02/g10"].period, OVEN), null);
  });

  await t.step("heralding budgets", () => {
    for (const request of ["open", "filtered", "chirp-up"] as const) {
      for (const id of READ) {
        const T = temperatureOf(id, PAIRS)!;
        for (const [arm, pol] of [["signal", "TE"], ["idler", "TM"]] as const) {
          const what = `${request} ${id} ${arm}`;
          const factors = {
            survival: survivalOf(id, T, pol),
            facet: facetOf(id, T, pol),
            coupling: couplingOf(id, pol),
            detector: 0.85,
          };
          for (const [name, expected] of Object.entries(factors)) {
            const figure = `${name}_${arm}` as "survival_signal";
            assertClose(mean(request, id, figure), expected, { rel: 0.002 }, `${what} ${name}`);
          }
          const product = ["survival", "facet", "coupling", "filter", "detector"]
            .map((f) => mean(request, id, `${f}_${arm}` as "survival_signal"))
            .reduce((a, b) => a * b);
          assertClose(mean(request, id, `heralding_${arm}`), product, { rel: 1e-4 }, what);
        }
      }
    }
  });

  await t.step("filters pass what they should", () => {
    for (const id of ["Z09-1/01/g1", "Z09-1/02/g2"] as const) {
      const T = temperatureOf(id, PAIRS)!;
      const { signal, idler } = second.filterShares(pairCase(id, T, 0, lot.FLAT, lot.GAUSS), 140);
      assertClose(mean("filtered", id, "filter_signal"), signal, { rel: 0.01 }, `${id} signal`);
      assertClose(mean("filtered", id, "filter_idler"), idler, { rel: 0.01 }, `${id} idler`);
      equal(mean("open", id, "filter_signal"), 1);
    }
  });

  await t.step("purity, chirped and not", () => {
    const { FLAT, GAUSS } = lot;
    for (
      const [request, gdd, signal, idler] of [
        ["open", 0, null, null],
        ["filtered", 0, FLAT, GAUSS],
        ["chirp-up", 3e5, FLAT, GAUSS],
        ["chirp-down", -3e5, FLAT, GAUSS],
        ["chirp-strong", 1.5e6, FLAT, FLAT],
      ] as const
    ) {
      for (const id of ["Z09-1/01/g1", "Z09-1/01/g2"] as const) {
        const T = temperatureOf(id, PAIRS)!;
        const expected = second.purity(pairCase(id, T, gdd, signal, idler), 96);
        const found = mean(request, id, "purity");
        assertClose(found, expected, { abs: 0.003 }, `${request} ${id}`);
        assertClose(mean(request, id, "schmidt_number"), 1 / found, { rel: 1e-3 }, `${request} ${id} K`);
      }
    }
    // The signal arm's g2 asks for its own filter alone.
    const T = temperatureOf("Z09-1/01/g2", PAIRS)!;
    const own = second.purity(pairCase("Z09-1/01/g2", T, 0, FLAT, null), 96);
    assertClose(mean("filtered", "Z09-1/01/g2", "g2_unheralded"), 1 + own, { abs: 0.005 }, "g2");
    // A chirp makes the pairs less pure: were its phase lost, these would be equal.
    ok(mean("filtered", "Z09-1/01/g2", "purity") - mean("chirp-strong", "Z09-1/01/g2", "purity") > 0.05);
  });

  await t.step("pairs per pulse", () => {
    for (const id of READ) {
      const T = temperatureOf(id, PAIRS)!;
      const d = second.miller(KTP, D24.d, D24.at, PAIRS);
      const expected = second.pairsPerPulse(pairCase(id, T, 0, null, null), 1e-4 / 76e6, {
        d,
        area: D24.area,
      }, 96);
      assertClose(mean("open", id, "pairs_per_pulse"), expected, { rel: 0.01 }, id);
    }
  });

  await t.step("efficiencies of a second harmonic and a sum frequency of crossed polarisations", () => {
    for (
      const [request, kind, w] of [
        ["double", "second-harmonic", PAIRS],
        ["open", "second-harmonic", PAIRS],
        ["sum", "sum-frequency", SUM],
      ] as const
    ) {
      for (const id of READ) {
        const T = temperatureOf(id, w)!;
        const expected = second.efficiency(KTP, w, T, domainsOf(id), {
          kind,
          d: second.miller(KTP, D24.d, D24.at, w),
          area: D24.area,
          alpha: alphas(id),
          guide: lot.DESIGN[id].length * 1e-3,
        });
        const found = mean(request, id, "efficiency_percent_per_w");
        assertClose(found, expected, { rel: 0.003 }, `${request} ${id}`);
        const cm = lot.DESIGN[id].poled / 10;
        assertClose(mean(request, id, "efficiency_percent_per_w_cm2"), expected / cm ** 2, { rel: 0.005 });
      }
    }
  });

  await t.step("a guide without an operating point keeps its budget and nothing else", () => {
    const { figures, decision, probability, limited_by } = guide("open", "Z09-1/02/g10");
    deepEqual([decision, probability, limited_by], ["reject", 0, "purity"]);
    equal(figures.operating_temperature_c.mean, 20);
    for (
      const name of ["purity", "pairs_per_pulse", "efficiency_percent_per_w", "operating_pump_nm"] as const
    ) {
      equal(figures[name].mean, null, name);
      ok(/no phase matching within the oven's 20–90 °C/.test(figures[name].reason!), figures[name].reason);
    }
    assertClose(figures.facet_signal.mean!, 1 - 0.0072, { abs: 1e-4 });
    ok(figures.survival_signal.mean! > 0.9 && figures.heralding_signal.mean! > 0.5);
  });

  await t.step("where nothing was read on the guide, the basis says so", () => {
    const basis = (id: string, figure: keyof Ranking["dies"][0]["figures"]) =>
      guide("open", id).figures[figure].basis;
    equal(basis("Z09-1/01/g1", "purity"), "measured");
    equal(basis("Z09-1/01/g2", "operating_temperature_c"), "platform");
    equal(basis("Z09-1/03/g1", "loss_db_cm_signal"), "measured");
    equal(basis("Z09-1/03/g2", "loss_db_cm_signal"), "die");
    assertClose(mean("open", "Z09-1/03/g1", "loss_db_cm_signal"), 0.45, { abs: 0.001 });
    // Its neighbour was read at 0.6 dB/cm, the platform says 0.5: between the two, the reading within its doubt.
    const idler = guide("open", "Z09-1/03/g2").figures.loss_db_cm_idler;
    ok(idler.mean! < 0.6 && 0.6 - idler.mean! < 2 * idler.u!, `${idler.mean} ± ${idler.u}`);
    equal(basis("Z09-1/03/g2", "coupling_signal"), "wafer");
    // Coated, but the spectrum is 100 nm away: the platform's coated default, never the bare facet's 7 %.
    equal(basis("Z09-1/03/g1", "facet_signal"), "platform");
    assertClose(mean("open", "Z09-1/03/g1", "facet_signal"), 0.99, { abs: 0.005 });
    ok(
      guide("open", "Z09-1/03/g2").figures.loss_db_cm_signal.u! >
        guide("open", "Z09-1/03/g1").figures.loss_db_cm_signal.u!,
    );
  });
});

Deno.test("doubling in lithium niobate with everything along one axis is that of an independent calculation", async () => {
  const { CLN } = second;
  const w: second.Waves = { p: 775e-9, s: 1550e-9, i: 1550e-9, pol: { p: "TM", s: "TM", i: "TM" } };
  const root = await Deno.makeTempDir({ prefix: "second-" });
  try {
    const loss = { p: 0.3, s: 0.2 };
    await lot.writeFiles(join(root, "N01"), {
      "lot.json": JSON.stringify({ lot: "N01", platform: "bulk-ln", wafers: [{ wafer: "N01-1" }] }),
      "guides.csv":
        "wafer,die,x_mm,y_mm,guide,group,width_um,period_um,length_mm,poled_from_mm,poled_length_mm\n" +
        "N01-1,01,0,0,g1,A,6,18.78,12,1,10\n",
      "readings/poling.csv":
        "wafer,die,guide,window_start_mm,window_length_mm,domains,duty_mean,duty_sd,merged\n" +
        "N01-1,01,g1,5,1,53,0.47,0,0\n",
      "readings/cutback.csv":
        "wafer,die,guide,wavelength_nm,polarisation,length_mm,insertion_loss_db,u_insertion_loss_db\n" +
        ([[775, loss.p], [1550, loss.s]] as const).flatMap(([nm, db]) =>
          [12, 6].map((l) => `N01-1,01,g1,${nm},TM,${l},${2 + db * l / 10},0.00001\n`)
        ).join(""),
    });
    await lot.writeRequests(join(root, "requests"), {
      "double-1550": {
        request: "double-1550",
        process: "second-harmonic",
        polarisations: { pump: "TM", signal: "TM", idler: "TM" },
        signal: { wavelength_nm: 1550, average_power_mw: 20 },
        oven_c: [20, 120],
      },
    });
    const options = ["--ledger", "ledger", "--format", "json"];
    equal((await wavelot(["ingest", "N01", ...options], root)).code, 0);
    const call = await wavelot(["rank", "double-1550", "--requests", "requests", ...options], root);
    equal(call.code, 0, call.stderr);
    const { figures } = (JSON.parse(call.stdout) as Ranking).dies[0]!;
    const T = second.rootTemperature(CLN, w, 18.78, [20, 120])!;
    assertClose(figures.operating_temperature_c.mean!, T, { abs: 0.01 }, "temperature");
    const alpha = {
      p: second.attenuation(loss.p),
      s: second.attenuation(loss.s),
      i: second.attenuation(loss.s),
    };
    const expected = second.efficiency(CLN, w, T, second.domainsFromDuty([[5.5, 0.47]], 18.78, 1, 10), {
      kind: "second-harmonic",
      d: second.miller(CLN, 25.2e-12, 1064e-9, w),
      area: 60e-12,
      alpha,
      guide: 12e-3,
    });
    assertClose(figures.efficiency_percent_per_w.mean!, expected, { rel: 0.003 }, "efficiency");
    // 20 mW through some %/W: hardly depleted, so P₂/P₁ is η·P₁ to a share of about η·P₁.
    const undepleted = expected / 100 * 0.02;
    assertClose(figures.peak_conversion.mean!, undepleted, { rel: 2 * undepleted }, "peak conversion");
  } finally {
    await Deno.remove(root, { recursive: true });
  }
});
