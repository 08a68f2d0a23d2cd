import { deepEqual, equal, match, ok } from "node:assert/strict";
import { resolveGuide, windowsByUnit } from "../../../pipeline/traits/guide_traits.ts";
import { TraitPools } from "../../../pipeline/traits/pools.ts";
import type { TraitRow } from "../../../pipeline/traits/trait_row.ts";
import { platformSchema } from "../../../shared/schemas/platform.ts";
import { assertClose } from "../../assert_close.ts";
import { request, TYPE_II } from "../../models/decision/a_guide.ts";
import { HERE, lotDesign, PLATFORM, SAME_DIE, traitRow } from "./a_lot.ts";

const PAIRS = request({
  process: "pair-generation",
  polarisations: TYPE_II,
  pump: { wavelength_nm: 791, average_power_mw: 1 },
  signal: { wavelength_nm: 1582 },
});
const SPEAKS = platformSchema.parse({
  ...PLATFORM,
  defaults: { ...PLATFORM.defaults, mismatch_sd_per_m: { value: 90, u: 40 } },
});
/** A scan's rows: what it told of the spread, its effective length, and the share of the peak that is left. */
const scan = (process: string, sd: number, u: number, over: Partial<TraitRow> = {}): TraitRow[] => {
  const at = { process, wavelength_nm: 1582, ...over };
  return [
    traitRow("mismatch_sd_per_m", HERE.guide_id, sd, { ...at, u }),
    traitRow("effective_length_mm", HERE.guide_id, 6, { ...at, u: 0.1 }),
    traitRow("peak_kept", HERE.guide_id, 0.8, { ...at, u: 0.05 }),
  ];
};
function spreadOf(rows: readonly TraitRow[], guide = HERE, platform = PLATFORM) {
  const { inputs, roles } = resolveGuide(
    new TraitPools(platform, lotDesign(), rows),
    windowsByUnit([]),
    guide,
    PAIRS,
    null,
  );
  return {
    spread: inputs.mismatchSpread ?? null,
    told: roles.filter((r) => r.role === "poling" && /mismatch_sd|effective_length|peak_kept/.test(r.trait)),
  };
}

Deno.test("a guide's own scan of the process gives its spread and its length, with the rows they are from", () => {
  const { spread, told } = spreadOf([...scan("TM>TM+TM", 300, 10), ...scan("TE>TE+TM", 120, 30)]);
  deepEqual([spread!.sd.value, spread!.sd.u, spread!.sd.basis], [120, 30, "measured"]);
  equal(spread!.correlationLength, 1e-3);
  deepEqual([spread!.scanned!.waves.polP, spread!.scanned!.waves.polI], ["TE", "TM"]);
  equal(spread!.scanned!.effectiveLength.value, 6);
  deepEqual(told.map((t) => [t.trait, t.used, t.from]), [
    ["mismatch_sd_per_m", [3], HERE.guide_id],
    ["effective_length_mm", [4], HERE.guide_id],
    ["peak_kept", [5], HERE.guide_id],
  ]);
});

Deno.test("repeats of a scan are weighed, and one that told nothing counts as nothing within its limit", () => {
  const { spread } = spreadOf([...scan("TE>TE+TM", 120, 30), ...scan("TE>TE+TM", 0, 60)]);
  assertClose(spread!.sd.value, 120 / (1 + 1 / 4), { rel: 1e-12 });
  assertClose(spread!.sd.u, 30 / Math.sqrt(1 + 1 / 4), { rel: 1e-12 });
  const { spread: none, told } = spreadOf(scan("TE>TE+TM", 0, 60), HERE, SPEAKS);
  equal(none, null);
  match(told[0]!.note!, /own scan tells no spread/);
});

Deno.test("a scan of another process on the guide speaks for want of one, and says whose it is", () => {
  const { spread, told } = spreadOf(scan("TM>TM+TM", 300, 10), HERE, SPEAKS);
  equal(spread!.scanned!.waves.polS, "TM");
  match(told[0]!.note!, /told of TM>TM\+TM at 1582\.0 nm/);
  const far = spreadOf(scan("TE>TE+TM", 300, 10, { wavelength_nm: 1700 }));
  match(far.told[0]!.note!, /told of TE>TE\+TM at 1700\.0 nm/);
});

Deno.test("a platform's default speaks for guides without a scan, pooled with the scans of others; else there is none", () => {
  equal(spreadOf([]).spread, null);
  equal(spreadOf(scan("TE>TE+TM", 200, 5), SAME_DIE).spread, null);
  const platform = spreadOf([], HERE, SPEAKS);
  deepEqual([platform.spread!.sd.value, platform.spread!.sd.u, platform.spread!.sd.basis], [
    90,
    40,
    "platform",
  ]);
  equal(platform.spread!.scanned, null);
  const pooled = spreadOf(scan("TE>TE+TM", 200, 5), SAME_DIE, SPEAKS).spread!;
  ok(pooled.sd.value > 100 && pooled.sd.value < 200 && pooled.sd.basis === "die", JSON.stringify(pooled.sd));
  // A scan whose shape told nothing at all is no reason to give the guide what others have.
  equal(spreadOf(scan("TE>TE+TM", 0, 60).slice(1, 2), HERE, SPEAKS).spread, null);
});
