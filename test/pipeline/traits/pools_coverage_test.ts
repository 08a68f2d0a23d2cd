import { ok } from "node:assert/strict";
import { drawTrait, meets, nestedStrata } from "../../../models/decision/mod.ts";
import { yieldRange } from "../../../models/decision/yields.ts";
import { spreadPrior } from "../../../models/pooling/mod.ts";
import { TraitPools } from "../../../pipeline/traits/pools.ts";
import { randomFrom } from "../../../shared/random.ts";
import { platformSchema } from "../../../shared/schemas/platform.ts";
import { drawnSd, type Layout, simulateLots } from "../../models/pooling/simulated_lots.ts";
import { guideRecord, lotDesign, PLATFORM, traitRow } from "./a_lot.ts";

const LOTS = 300;
/** Least size that a request might ask for: near the mean, where it is hard to tell. */
const LIMIT = 0.48;
const SPREAD = { lotSd: 0.05, waferSd: 0.03, dieSd: 0.02, guideSd: 0.02 };
const SCALED = platformSchema.parse({
  ...PLATFORM,
  defaults: { mfd_x_um: { value: 0.5, u: 0.1, at_nm: 1582 } },
  priors: { mfd_x_um: { lot_sd: 0.05, wafer_sd: 0.03, die_sd: 0.02, guide_sd: 0.02 } },
});
/** What the effects leave of the default's u: the prior of the mean. */
const MEAN_SD = Math.sqrt(0.1 ** 2 - 0.05 ** 2 - 0.03 ** 2 - 2 * 0.02 ** 2);

const LAYOUT: Layout = {
  lots: 3,
  wafers: 3,
  wafersRead: 2,
  dies: 4,
  diesRead: 3,
  guides: 4,
  guidesRead: 2,
  u: [0.005, 0.03],
};
/** A guide of each kind, of the first lot. */
const ASKED = {
  measured: "L0-0/0/g0",
  "of a read die": "L0-0/0/g2",
  "of a read wafer": "L0-0/3/g0",
  "of an unread wafer": "L0-2/0/g0",
};

Deno.test("rows of other wavelengths and lots, carried and pooled, give intervals and probabilities that hold what they promise", () => {
  const covered = new Map(Object.keys(ASKED).map((what) => [what, 0]));
  const promised = new Map(
    Object.keys(ASKED).map((what) => [what, { expected: 0, variance: 0, met: 0 }]),
  );
  for (let n = 0; n < LOTS; n++) {
    const random = randomFrom(`rows ${n}`);
    const { logSd } = spreadPrior(SPREAD, 2);
    const spread = {
      lotSd: drawnSd(SPREAD.lotSd, logSd, random),
      waferSd: drawnSd(SPREAD.waferSd, logSd, random),
      dieSd: drawnSd(SPREAD.dieSd, logSd, random),
      guideSd: drawnSd(SPREAD.guideSd, logSd, random),
    };
    const truth = { mean: 0.5 + MEAN_SD * random.normal(), spread };
    const { observations, places, guides } = simulateLots(LAYOUT, truth, random);
    // Read at one wavelength and asked at another: sizes go with it, and the default is stated at a third.
    const rows = observations.map((o) => ({
      lot: o.lot,
      row: traitRow("mfd_x_um", o.guide!, o.value * 1550 / 1582, {
        wavelength_nm: 1550,
        polarisation: "TE",
        u: o.u * 1550 / 1582,
      }),
    }));
    const records = guides.filter((g) => g.lot === "L0").map((g) =>
      guideRecord(g.guide, { x_mm: places.get(g.die)!.x, y_mm: places.get(g.die)!.y })
    );
    const own = rows.filter((r) => r.lot === "L0").map((r) => r.row);
    const others = ["L1", "L2"].map((lot) => ({
      lot,
      rows: rows.filter((r) => r.lot === lot).map((r) => r.row),
      places,
    }));
    const design = lotDesign({ lot: { ...lotDesign().lot, lot: "L0" } }, records);
    const pools = new TraitPools(SCALED, design, own, others);
    for (const [what, id] of Object.entries(ASKED)) {
      const { value, u } = pools.estimate("mfd_x_um", records.find((r) => r.guide_id === id)!, 1582, "TE")!;
      const { truth } = guides.find((g) => g.guide === id)!;
      if (Math.abs(truth - value) <= 1.959964 * u) covered.set(what, covered.get(what)! + 1);
      const strata = nestedStrata(256, 16, randomFrom(`${id} ${n}`));
      const draws = drawTrait({ value, u }, { low: 0.1 }, strata);
      const p = meets(draws, { atLeast: LIMIT, atMost: Infinity }).reduce((sum, x) => sum + x, 0) / 256;
      const now = promised.get(what)!;
      promised.set(what, {
        expected: now.expected + p,
        variance: now.variance + p * (1 - p),
        met: now.met + (truth >= LIMIT ? 1 : 0),
      });
    }
  }
  const { low, high } = yieldRange(new Float64Array(LOTS).fill(0.95), 0.999);
  for (const [what, count] of covered) {
    ok(count >= low && count <= high, `guide ${what}: ${count} of ${LOTS} covered, need ${low}…${high}`);
  }
  // The probability of meeting a limit is what it says: as many meet it as the probabilities add up to.
  for (const [what, { expected, variance, met }] of promised) {
    const off = (met - expected) / Math.sqrt(variance);
    ok(Math.abs(off) < 3.3, `guide ${what}: ${met} meet the limit, ${expected.toFixed(1)} were promised`);
  }
});
