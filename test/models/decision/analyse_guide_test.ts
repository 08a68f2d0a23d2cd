import assert from "node:assert/strict";
import fc from "fast-check";
import {
  analyseGuide,
  type GuideInputs,
  predictGuide,
  RESTORE_GROUP_NAMES,
  restoredInputs,
} from "../../../models/decision/mod.ts";
import { drawTraits } from "../../../models/decision/drawn_traits.ts";
import { platformSchema } from "../../../shared/schemas/platform.ts";
import { assertClose } from "../../assert_close.ts";
import { guide, ktp, request, trait, TYPE_II } from "./a_guide.ts";

const platform = platformSchema.parse(JSON.parse(Deno.readTextFileSync("models/platforms/bulk-ktp.json")));
const known = { byTrait: { loss_db_cm: { u: 0.01, from: "median of 4 of lot A" } }, contrast: 0.01 };
const doubled = (require: object[]) =>
  request({
    process: "second-harmonic",
    polarisations: TYPE_II,
    signal: { wavelength_nm: 1582 },
    require,
  });
const analysed = (checked: ReturnType<typeof doubled>, inputs: GuideInputs, targets = {}) => {
  const made = predictGuide(ktp, checked, inputs, { recorded: null });
  const question = {
    decision: made.decision,
    designWidth_um: 3,
    platform: { ...platform, targets },
    known,
  };
  return { made, analysis: analyseGuide(ktp, checked, inputs, question, { recorded: null }) };
};

/** Loss of the signal alone is uncertain, and its limit lies at its mean. */
const lossy: GuideInputs = { ...guide, signal: { ...guide.signal, loss: trait(0.5, 0.1, "loss s") } };

Deno.test("analyseGuide() names the reading that settles a held guide, with the u that it would have", () => {
  const { analysis } = analysed(doubled([{ figure: "loss_db_cm_signal", at_most: 0.5 }]), lossy);
  const best = analysis.readings[0]!;
  assert.equal(best.reading.kind, "fringes");
  assert.deepEqual(best.reading.reads.map((r) => [r.trait, r.u, r.from]), [
    ["loss_db_cm", 0.01, "median of 4 of lot A"],
  ]);
  assertClose(best.doubt, 0.25, { abs: 0.01 });
  // What a reading ten times better than the spread leaves open is small.
  assert.ok(best.reduction > 0.85 * best.doubt && best.after.hold < 0.15);
  const others = analysis.readings.slice(1);
  assert.ok(others.length > 0 && others.every((r) => r.reduction < 0.05 * r.doubt));
});

Deno.test("analyseGuide() offers no reading of what was read on the guide, and none of a grating known by its walls", () => {
  const checked = doubled([{ figure: "loss_db_cm_signal", at_most: 0.5 }]);
  const kinds = (inputs: GuideInputs) =>
    analysed(checked, inputs).analysis.readings.map((r) => r.reading.kind).sort();
  const poling = {
    from: "duty" as const,
    duty: trait(0.5, 0.02, "duty"),
    dutySd: trait(0.03, 0.01, "duty_sd"),
    merged: trait(0.01, 0.01, "merged"),
  };
  assert.ok(kinds({ ...lossy, poling }).includes("poling"));
  const walls = Float64Array.from({ length: 780 }, (_, j) => 0.001 + 46.1e-6 * (j / 2 + 0.25));
  assert.ok(!kinds({ ...lossy, poling: { from: "walls", walls, basis: "measured" } }).includes("poling"));
  const measured = { ...trait(0.5, 0.1, "loss s"), basis: "measured" as const };
  const read = kinds({ ...lossy, signal: { ...lossy.signal, loss: measured } });
  // The idler's loss is left.
  assert.equal(read.filter((k) => k === "fringes").length, 1);
});

Deno.test("analyseGuide() restores one group at a time: the one at fault brings the guide back, others leave it", () => {
  const lost: GuideInputs = { ...lossy, signal: { ...guide.signal, loss: trait(2, 0.1, "loss s") } };
  const { analysis } = analysed(doubled([{ figure: "loss_db_cm_signal", at_most: 1 }]), lost);
  const of = (group: string) => analysis.restored.find((r) => r.group === group)!;
  assert.equal(analysis.probability, 0);
  assert.equal(analysis.readings.length, 0, "a rejected guide needs no reading");
  assert.deepEqual([of("loss").probability, of("loss").decision], [1, "accept"]);
  assert.equal(of("all").probability, 1);
  for (const group of ["mode_size", "facet", "poling"]) assert.equal(of(group).probability, 0, group);
});

Deno.test("analyseGuide() brings a guide that matches nowhere back by its phase matching alone", () => {
  const off: GuideInputs = { ...guide, offset: trait(20_000, 0, "offset") };
  const { made, analysis } = analysed(doubled([{ figure: "efficiency_percent_per_w", at_least: 0.01 }]), off);
  assert.equal(made.matched, 0);
  for (const { group, probability } of analysis.restored) {
    assert.equal(probability, group === "phase_matching" || group === "all" ? 1 : 0, group);
  }
});

Deno.test("analyseGuide() takes a stated target before the platform's default", () => {
  const checked = doubled([{ figure: "loss_db_cm_signal", at_most: 0.2 }]);
  const of = (targets: object) =>
    analysed(checked, lossy, targets).analysis.restored.find((r) => r.group === "loss")!.probability;
  assert.deepEqual([of({}), of({ loss_db_cm: 0.1 }), of({ loss_db_cm: { TE: 0.1 } })], [0, 1, 1]);
});

Deno.test("restoredInputs() keeps what all guides of the lot are off by: a target the platform states comes first", () => {
  const checked = doubled([]);
  const offsetOf = (usualOffset: number | undefined, targets: object) =>
    restoredInputs(
      { ...lossy, ...(usualOffset === undefined ? {} : { usualOffset }) },
      ["phase_matching"],
      checked,
      {
        platform: { ...platform, targets },
        designWidth_um: 3,
      },
    ).offset;
  assert.deepEqual([offsetOf(undefined, {})!.value, offsetOf(-350, {})!.value, offsetOf(-350, {})!.u], [
    0,
    -350,
    0,
  ]);
  assert.equal(offsetOf(-350, { mismatch_offset_per_m: 20 })!.value, 20);
});

Deno.test("restoredInputs() leaves the draws of every other trait as they are", () => {
  const checked = doubled([]);
  const made = drawTraits(lossy).columns;
  const group = fc.constantFrom(...RESTORE_GROUP_NAMES);
  fc.assert(fc.property(fc.uniqueArray(group, { minLength: 1 }), (groups) => {
    const again = restoredInputs(lossy, groups, checked, { platform, designWidth_um: 3 });
    for (const column of drawTraits(again).columns) {
      const before = made.find((c) => c.key === column.key);
      if (before === undefined) assert.equal(column.u, 0, column.key);
      else assert.deepEqual(column.draws, before.draws, column.key);
    }
  }));
});
