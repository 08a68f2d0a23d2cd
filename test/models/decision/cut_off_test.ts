import { equal, match, ok } from "node:assert/strict";
import { predictGuide } from "../../../models/decision/mod.ts";
import { guide, request } from "./a_guide.ts";
import { doubling, solvedPlatform, TYPE_TWO } from "./solved_guide.ts";

const checked = request({
  process: "second-harmonic",
  polarisations: { pump: "TM", signal: "TM", idler: "TM" },
  signal: { wavelength_nm: 1550, average_power_mw: 10 },
  require: [{ figure: "efficiency_percent_per_w", at_least: 1 }],
});

Deno.test("a guide that carries no mode at the asked wavelength is an answer with that reason, never a number", () => {
  // Half the step of the built-in platform: TM leaves the guide well before 1550 nm.
  const { model } = solvedPlatform("rb-ktp-zcut", 3, [doubling(1550, "TM")], {
    index_step: { TE: 0.015, TM: 0.005 },
  } as never);
  const made = { ...guide, geometry: { width_um: 3 } };
  const found = predictGuide(model, checked, made, { recorded: null });
  equal(found.decision, "reject");
  equal(found.matched, 0);
  for (const { figure, mean, u, reason } of found.figures) {
    if (figure.startsWith("loss_db_cm")) continue; // what was read of the guide stays
    equal(mean, null, figure);
    equal(u, null, figure);
    match(reason!, /^TM mode at 1550 nm is cut off: TM is not safely guided beyond \d+(\.\d)? nm /, figure);
  }
  // The other polarisation of the same guide is as good as ever.
  ok(model.index.nEff("TE", 1550e-9, 50, made.geometry) > 1.7);
});

Deno.test("a design whose narrowest guide alone is cut off says that a smaller span helps", () => {
  const { model } = solvedPlatform("rb-ktp-zcut", 2, [TYPE_TWO]);
  const reason = model.index.cutOff!("TE", { width_um: 2 }, 1582e-9)!;
  match(
    reason,
    /a guide as drawn still carries it: its table spans ± 0\.5 µm of width, a smaller span in the platform file/,
  );
});

Deno.test("several guided modes are told with their number", () => {
  const waves = doubling(1550, "TM");
  const { model, designs } = solvedPlatform("ti-ln-zcut", 7, [waves]);
  const found = predictGuide(model, checked, {
    ...guide,
    period: 17.08e-6,
    geometry: { width_um: 7, titanium_nm: 100 },
  }, {
    recorded: null,
  });
  const pump = designs.outputs.find((o) => o.lambda === waves.lambdaP)!.result;
  if (pump.cutOff) throw new Error(pump.reason);
  const count = pump.modes.even + pump.modes.odd;
  ok(count > 2);
  ok(
    found.remarks.some((r) =>
      r.includes(`several_modes: a guide drawn 7 µm wide carries ${count} TM modes at 775 nm`)
    ),
  );
});
