import { deepEqual, equal, ok } from "node:assert/strict";
import betaCdf from "@stdlib/stats-base-dists-beta-cdf";
import { type GuideInputs, matchingPeriod, predictGuide } from "../../../models/decision/mod.ts";
import { tellingScan } from "../../../models/decision/other_scan.ts";
import { mismatch, mismatchOverTemperature } from "../../../models/guides/mod.ts";
import { phaseMatchingTemperatures } from "../../../models/poling/mod.ts";
import { resolveGuide } from "../../../pipeline/traits/guide_traits.ts";
import { TraitPools } from "../../../pipeline/traits/pools.ts";
import type { TraitRow } from "../../../pipeline/traits/trait_row.ts";
import { platformSchema } from "../../../shared/schemas/platform.ts";
import { randomFrom } from "../../../shared/random.ts";
import { mean } from "../../../shared/statistics.ts";
import { assertClose } from "../../assert_close.ts";
import { request } from "../../models/decision/a_guide.ts";
import { doubling, solvedPlatform } from "../../models/decision/solved_guide.ts";
import { guideRecord, HERE, lotDesign, PLATFORM, SAME_DIE, SAME_LOT, SAME_WAFER, traitRow } from "./a_lot.ts";

const scan = (unit: string, value: number, process: string, nm = 1582, over: Partial<TraitRow> = {}) =>
  traitRow("mismatch_offset_per_m", unit, value, { wavelength_nm: nm, process, u: 10, ...over });
const TYPE_ZERO = "TM>TM+TM";
const asked = request({
  process: "second-harmonic",
  polarisations: { pump: "TE", signal: "TE", idler: "TM" },
  signal: { wavelength_nm: 1582, average_power_mw: 10 },
});
const withDefaults = (defaults: object, priors: object = {}) =>
  platformSchema.parse({
    ...PLATFORM,
    defaults: { ...PLATFORM.defaults, width_error_um: { value: 0, u: 0.1 }, ...defaults },
    priors: { ...PLATFORM.priors, ...priors },
  });
const OFFSET = { mismatch_offset_per_m: { value: 0, u: 2000 } };
const PRIORS = {
  mismatch_offset_per_m: { lot_sd: 2000, wafer_sd: 40, die_sd: 30, guide_sd: 30 },
  width_error_um: { lot_sd: 0.06, wafer_sd: 0.03, die_sd: 0.03, guide_sd: 0.05 },
};
const resolve = (rows: readonly TraitRow[], platform = withDefaults({}), guide = HERE, of = asked) =>
  resolveGuide(new TraitPools(platform, lotDesign(), rows), new Map(), guide, of, null);

Deno.test("a scan of another process is compared with the calculation where the platform doesn't say how far that is off", () => {
  const { inputs, roles } = resolve([scan(HERE.guide_id, 300, TYPE_ZERO)]);
  const [other] = inputs.otherScans!;
  deepEqual([other!.offset.value, other!.offset.u, other!.expected, other!.read], [300, 10, {
    value: 0,
    u: 0,
  }, 0]);
  deepEqual(other!.shares, { width_um: { felt: 1, own: 1 } });
  deepEqual([other!.waves.polP, other!.waves.polS, other!.waves.polI], ["TM", "TM", "TM"]);
  assertClose(other!.waves.lambdaP, 791e-9, { rel: 1e-12 });
  equal(inputs.offset, null);
  const told = roles.filter((r) => r.role === "phase_matching" && r.trait.includes("offset"));
  deepEqual(told.map((r) => [r.trait, r.used, r.basis, r.wavelength_nm]), [
    ["TM>TM+TM mismatch_offset_per_m", [0], "measured", 1582],
  ]);
  ok(told[0]!.note!.includes("cross-section"));
});

Deno.test("a guide whose own process was scanned, or that was not scanned, hears of no other", () => {
  const both = [scan(HERE.guide_id, 300, TYPE_ZERO), scan(HERE.guide_id, 20, "TE>TE+TM", 1600)];
  equal(resolve(both).inputs.otherScans, undefined);
  equal(resolve([scan(SAME_DIE.guide_id, 300, TYPE_ZERO)]).inputs.otherScans, undefined);
  // The same polarisations beyond ±5 % are another process.
  const far = resolve([scan(HERE.guide_id, 20, "TE>TE+TM", 1700), scan(HERE.guide_id, 21, "TE>TE+TM", 1750)]);
  deepEqual(far.inputs.otherScans!.map((s) => s.offset.value), [20]);
});

Deno.test("what is expected comes from scans of the process on other guides, never from the guide's own", () => {
  const platform = withDefaults(OFFSET, PRIORS);
  const others = [scan(SAME_DIE.guide_id, 1000, TYPE_ZERO), scan(SAME_WAFER.guide_id, 1010, TYPE_ZERO)];
  const at = (own: number) => resolve([...others, scan(HERE.guide_id, own, TYPE_ZERO)], platform);
  const [near, far] = [at(1005), at(5000)];
  const [a, b] = [near.inputs.otherScans![0]!, far.inputs.otherScans![0]!];
  deepEqual(a.expected, b.expected);
  assertClose(a.expected.value, 1004, { abs: 6 });
  ok(a.expected.u > 20 && a.expected.u < 120, `${a.expected.u}`);
  ok(a.read > 0.99);
  // Most of a width error is common to the guides of a die or wafer: the others' scans hold that.
  const { felt, own } = a.shares.width_um!;
  ok(felt > 0.2 && felt < 0.6 && own === felt, `${felt}, ${own}`);
  const expected = near.roles.find((r) => r.trait === "TM>TM+TM expected_offset_per_m")!;
  deepEqual([expected.value, expected.basis, expected.used], [a.expected.value, "die", [0]]);
  // Nobody else was scanned: all is told, but the platform's doubt hides it.
  const alone = resolve([scan(HERE.guide_id, 900, TYPE_ZERO)], platform).inputs.otherScans![0]!;
  deepEqual([alone.expected, alone.shares.width_um], [{ ...alone.expected, value: 0, u: 2000 }, {
    felt: 1,
    own: 1,
  }]);
  // Farther guides have less in common with it.
  const shareWith = (guide: typeof HERE) =>
    resolve([scan(guide.guide_id, 1000, TYPE_ZERO), scan(HERE.guide_id, 900, TYPE_ZERO)], platform)
      .inputs.otherScans![0]!.shares.width_um!.felt;
  const [die, wafer, lot] = [SAME_DIE, SAME_WAFER, SAME_LOT].map(shareWith);
  ok(die! < wafer! && wafer! < lot! && lot! < 1, `${die} ${wafer} ${lot}`);
});

Deno.test("scans of the asked process on other guides hold what these have in common with the guide, too", () => {
  const rows = [scan(HERE.guide_id, 300, TYPE_ZERO), scan(SAME_DIE.guide_id, 20, "TE>TE+TM")];
  const { felt, own } = resolve(rows, withDefaults(OFFSET, PRIORS)).inputs.otherScans![0]!.shares.width_um!;
  equal(felt, 1);
  ok(own > 0.2 && own < 0.6, `${own}`);
});

Deno.test("over simulated lots the width that a scan tells covers the true one, and would not if what is common were told twice", () => {
  const platform = withDefaults(OFFSET, PRIORS);
  const [S, uScan] = [4000, 10];
  const { width_error_um: w, mismatch_offset_per_m: m } = PRIORS;
  let [covered, naive, all] = [0, 0, 0];
  const ratios: number[] = [];
  for (let lot = 0; lot < 40; lot++) {
    const random = randomFrom(`lot ${lot}`);
    const normal = (sd: number) => sd * random.normal();
    const common = { w: normal(w.lot_sd) + normal(w.wafer_sd), m: normal(m.lot_sd) + normal(m.wafer_sd) };
    const guides = Array.from({ length: 4 }, (_, d) => {
      const die = { w: normal(w.die_sd), m: normal(m.die_sd) };
      return Array.from({ length: 2 }, (_, g) => ({
        ...guideRecord(`A-1/0${d}/g${g}`),
        q: common.w + die.w + normal(w.guide_sd),
        c: common.m + die.m + normal(m.guide_sd),
      }));
    }).flat();
    const rows = guides.map(({ guide_id, q, c }) =>
      scan(guide_id, c + S * q + normal(uScan), TYPE_ZERO, 1582, {
        u: uScan,
        u_pooled: Math.hypot(uScan, S * 0.1),
      })
    );
    const pools = new TraitPools(platform, lotDesign({}, guides), rows);
    for (const { q, ...guide } of guides.slice(0, 4)) {
      const { inputs } = resolveGuide(pools, new Map(), guide, asked, null);
      const inside = (otherScans: GuideInputs["otherScans"]) => {
        const from = { geometryErrors: inputs.geometryErrors, otherScans: otherScans! };
        const told = tellingScan(from, () => ({ slope: () => S, bend: () => 0 }))!;
        const u = inputs.geometryErrors[0]!.trait.u;
        const [G, weight] = [told.gain("width_um"), told.weight("width_um")];
        const left = u * Math.sqrt(1 - G * weight);
        return { left: left / u, inside: Math.abs(q - G * told.surprise) <= 1.96 * left };
      };
      const [as, twice] = [
        inside(inputs.otherScans),
        inside(inputs.otherScans!.map((s) => ({ ...s, shares: {} }))),
      ];
      all++;
      covered += as.inside ? 1 : 0;
      naive += twice.inside ? 1 : 0;
      ratios.push(as.left);
    }
  }
  // P(at most so many | p = 0.95) by the beta function. More is no harm: neighbours' width errors count as noise of their own.
  const atMost = (n: number) => n === all ? 1 : 1 - betaCdf(0.95, n + 1, all - n);
  ok(atMost(covered) > 0.005, `${covered} of ${all} covered`);
  ok(atMost(naive) < 1e-6, `${naive} of ${all} covered without shares`);
  ok(mean(ratios) < 0.95, `${mean(ratios)}`);
});

Deno.test("a guide's temperature follows its scan of another process to what its width would make of it", () => {
  // Type 0 at 1550 nm by a scan at 1650 nm, which is more than 5 % away.
  const [here, there] = [doubling(1550, "TM"), doubling(1650, "TM")];
  const width = 7;
  const { model } = solvedPlatform("ti-ln-zcut", width, [here, there]);
  const geometry = { width_um: width };
  const period = matchingPeriod(model, { waves: here, geometry, temperatureC: 60 });
  const guide = guideRecord(HERE.guide_id, { width_um: width, period_um: 1e6 * period });
  const checked = request({
    process: "second-harmonic",
    polarisations: { pump: "TM", signal: "TM", idler: "TM" },
    signal: { wavelength_nm: 1550, average_power_mw: 10 },
    oven_c: [16, 129],
  });
  // A scan at 30 °C reads so much more where the guide is so much wider than it is taken to be.
  const wider = 0.15;
  const made = { width_um: width + wider };
  const value = mismatch(model.index, there, 30, made) - mismatch(model.index, there, 30, geometry);
  const predicted = (rows: readonly TraitRow[]) => {
    const { inputs } = resolve(rows, withDefaults({}), guide, checked);
    const { figures, remarks } = predictGuide(model, checked, inputs, { recorded: null });
    return { remarks, T: figures.find((f) => f.figure === "operating_temperature_c")! };
  };
  const plain = predicted([]);
  const told = predicted([scan(HERE.guide_id, value, TYPE_ZERO, 1650, { u: 60 })]);
  const bare = mismatchOverTemperature(model.index, here, made);
  const vector = (t: number) => 2 * Math.PI / (period * model.expansion(t));
  const [T] = phaseMatchingTemperatures(bare, vector, [16, 129]).roots;
  ok(
    Math.abs(plain.T.mean! - T!) > 10 * Math.abs(told.T.mean! - T!),
    `${plain.T.mean}, ${told.T.mean}, ${T}`,
  );
  ok(
    told.T.u! < 0.4 * plain.T.u! && Math.abs(told.T.mean! - T!) < 2 * told.T.u!,
    `${told.T.u}, ${plain.T.u}`,
  );
  assertClose(told.T.uLinear!, told.T.u!, { rel: 0.1 });
  ok(told.remarks.some((r) => r.startsWith("other_scan: the guide's scan of TM>TM+TM at 1650.0 nm acts")));
  ok(plain.remarks.every((r) => !r.startsWith("other_scan")));
});
