import assert from "node:assert/strict";
import { type GuideInputs, type PlatformModel, predictGuide } from "../../../models/decision/mod.ts";
import { restoredInputs } from "../../../models/decision/restored_inputs.ts";
import { centredOverlap } from "../../../models/metrology/mod.ts";
import { solvedCoupling, type SolvedOutput } from "../../../models/guides/mod.ts";
import type { Figure } from "../../../shared/schemas/figures.ts";
import type { Basis } from "../../../shared/vocabulary.ts";
import { assertClose } from "../../assert_close.ts";
import { guide, ktp, request, trait, TYPE_II } from "./a_guide.ts";

const FIBRE = 10.4;
const asked = request({
  process: "pair-generation",
  polarisations: TYPE_II,
  pump: { wavelength_nm: 791, average_power_mw: 0.1 },
  signal: { wavelength_nm: 1582, fibre_mfd_um: FIBRE },
  idler: { fibre_mfd_um: FIBRE },
});
const design = { geometry: { width_um: 3 } } as SolvedOutput["design"];
const output = (pol: "TE" | "TM", result: object) =>
  ({ design, pol, lambda: 1582e-9, result }) as unknown as SolvedOutput;
const outputs = [
  output("TE", { cutOff: false, fibres: [{ mfd: FIBRE * 1e-6, value: 0.868, depth: 4e-6 }] }),
  output("TM", { cutOff: true, reason: "none" }),
];
const solvedModel: PlatformModel = {
  ...ktp,
  solvedCoupling: (geometry, pol, lambda, mfd) => solvedCoupling(outputs, geometry, pol, lambda, mfd),
};

/** The guide with a signal mode of a basis and relative uncertainty; its size is 8 µm × 6 µm. */
function signalMode(basis: Basis, relative = 0.1): GuideInputs {
  const size = (value: number, key: string) => ({ ...trait(value, relative * value, key), basis });
  return { ...guide, signal: { ...guide.signal, mode: { x: size(8, "x"), y: size(6, "y") } } };
}
function predicted(of: GuideInputs, model = solvedModel) {
  const { figures, remarks } = predictGuide(model, asked, of, { recorded: null });
  return {
    figure: (name: Figure) => figures.find((f) => f.figure === name)!,
    remarks: remarks.filter((r) => r.startsWith("solved_coupling")),
  };
}
const stated = centredOverlap([8e-6, 6e-6], [FIBRE * 1e-6, FIBRE * 1e-6]);

Deno.test("without a reading of the mode the solved field's coupling is used, spread as the platform's mode size is", () => {
  const sure = predicted(signalMode("platform", 0));
  assertClose(sure.figure("coupling_signal").mean!, 0.868, { rel: 1e-12 });
  assert.equal(sure.figure("coupling_signal").basis, "platform");
  assert.deepEqual(sure.remarks, [
    "solved_coupling: the signal's fibre takes 0.868 of the design's solved field, which is used; the Gaussian estimate " +
    `of the platform's mode size would be ${stated.toFixed(3)}`,
  ]);
  const unsure = predicted(signalMode("platform"));
  const gaussian = predicted(signalMode("platform"), ktp);
  const relative = (p: typeof unsure) => p.figure("coupling_signal").u! / p.figure("coupling_signal").mean!;
  assertClose(relative(unsure), relative(gaussian), { rel: 1e-9 });
  assert.ok(unsure.figure("coupling_signal").hi! <= 1);
  // The idler's mode is cut off in the design: the Gaussian is all there is, and nothing is said.
  assert.equal(unsure.figure("coupling_idler").mean, gaussian.figure("coupling_idler").mean);
});

Deno.test("a mode size that was read goes before the solved field, whose number is told beside it", () => {
  for (const basis of ["measured", "lot"] as const) {
    const read = predicted(signalMode(basis, 0));
    assertClose(read.figure("coupling_signal").mean!, stated, { rel: 1e-12 });
    assert.deepEqual(read.remarks, [
      "solved_coupling: the signal's fibre takes 0.868 of the design's solved field; used is the Gaussian estimate of its " +
      `measured mode size, ${stated.toFixed(3)}`,
    ]);
  }
});

Deno.test("a size read in another lot goes before the solved field, too, and a mode at its target keeps the estimate as made", () => {
  const unread = signalMode("platform", 0);
  assert.ok(!("reason" in unread.signal.mode));
  const elsewhere = { ...unread, signal: { ...unread.signal, mode: { ...unread.signal.mode, read: true } } };
  assertClose(predicted(elsewhere).figure("coupling_signal").mean!, stated, { rel: 1e-12 });
  const platform = {
    targets: {},
    defaults: { mfd_x_um: { value: 8, u: 1 }, mfd_y_um: { value: 6, u: 1 } },
  };
  const atTarget = (of: GuideInputs) =>
    predicted(restoredInputs(of, ["mode_size"], asked, { platform, designWidth_um: 3 }))
      .figure("coupling_signal").mean!;
  // The target is the size as made: nothing is gained, whichever estimate is used.
  for (const inputs of [elsewhere, signalMode("die", 0), unread]) {
    assertClose(atTarget(inputs), predicted(inputs).figure("coupling_signal").mean!, { rel: 1e-12 });
  }
});

Deno.test("where no mode size is known at all the solved field still tells a coupling, and without one there is none", () => {
  const unknown: GuideInputs = { ...guide, signal: { ...guide.signal, mode: { reason: "nobody looked" } } };
  const solved = predicted(unknown);
  assert.equal(solved.figure("coupling_signal").mean, 0.868);
  assert.match(solved.remarks[0]!, /which is used; no mode size is known/);
  const none = predicted(unknown, ktp).figure("coupling_signal");
  assert.deepEqual([none.mean, none.reason], [null, "nobody looked"]);
});

Deno.test("a coupling was solved for its own fibre, wavelength and polarisation only", () => {
  const at = (pol: "TE" | "TM", lambda: number, mfd: number) =>
    solvedCoupling(outputs, { width_um: 3.05 }, pol, lambda, mfd);
  assert.equal(at("TE", 1582e-9, FIBRE * 1e-6), 0.868);
  assert.equal(at("TE", 1582e-9, 9e-6), null);
  assert.equal(at("TE", 1400e-9, FIBRE * 1e-6), null);
  assert.equal(at("TM", 1582e-9, FIBRE * 1e-6), null);
});
