import assert from "node:assert/strict";
import { type GuideInputs, predictGuide } from "../../../models/decision/mod.ts";
import type { Basis } from "../../../shared/vocabulary.ts";
import { guide, ktp, request, trait, TYPE_II } from "./a_guide.ts";

/** The guide with every trait of one basis; its signal loss is 0.5 ± 0.2 dB/cm. */
function known(basis: Basis, over: Partial<GuideInputs> = {}): GuideInputs {
  const by = <T extends object>(t: T) => ({ ...t, basis });
  const arm = (a: GuideInputs["signal"]) => ({
    loss: { ...trait(0.5, 0.2, "loss"), basis },
    mode: "reason" in a.mode ? a.mode : { x: by(a.mode.x), y: by(a.mode.y) },
    facet: a.facet,
  });
  const { poling } = guide;
  assert.ok(poling.from === "duty");
  return {
    ...guide,
    pumpLoss: by(guide.pumpLoss),
    signal: arm(guide.signal),
    idler: arm(guide.idler),
    poling: { from: "duty", duty: by(poling.duty), dutySd: by(poling.dutySd), merged: by(poling.merged) },
    ...over,
  };
}

const decided = (inputs: GuideInputs, limits: { at_most?: number; at_least?: number }) => {
  const asked = request({
    process: "second-harmonic",
    polarisations: TYPE_II,
    signal: { wavelength_nm: 1582 },
    require: [{ figure: "loss_db_cm_signal", ...limits }],
  });
  const { decision, probability, remarks } = predictGuide(ktp, asked, inputs, { recorded: null });
  return { decision, probability, unread: remarks.filter((r) => r.startsWith("unread: ")) };
};

Deno.test("what the platform's defaults alone would accept or reject is held, and says so", () => {
  for (const [limits, verb] of [[{ at_most: 0.9 }, "accepted"], [{ at_most: 0.2 }, "rejected"]] as const) {
    const { decision, probability, unread } = decided(known("platform"), limits);
    assert.equal(decision, "hold");
    assert.ok(
      verb === "accepted" ? probability > 0.95 : probability > 0 && probability < 0.1,
      `${probability}`,
    );
    assert.match(unread.join(), new RegExp(`would be ${verb} on the platform's defaults alone`));
  }
});

Deno.test("one reading of the lot under a required figure, and the decision stands; what no draw meets stays rejected", () => {
  const read = known("platform", {
    signal: { ...known("platform").signal, loss: { ...trait(0.5, 0.2, "read"), basis: "lot" } },
  });
  assert.deepEqual([decided(read, { at_most: 0.9 }).decision, decided(read, { at_most: 0.2 }).decision], [
    "accept",
    "reject",
  ]);
  assert.deepEqual(decided(read, { at_most: 0.2 }).unread, []);
  assert.equal(decided(known("platform"), { at_least: 5 }).decision, "reject");
  // A mode size that the request does not ask for is no reading of what it hangs on.
  const { signal } = known("platform");
  assert.ok(!("reason" in signal.mode));
  const beside = known("platform", {
    signal: { ...signal, mode: { x: { ...signal.mode.x, basis: "measured" }, y: signal.mode.y } },
  });
  assert.equal(decided(beside, { at_most: 0.9 }).decision, "hold");
});
