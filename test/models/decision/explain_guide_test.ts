import assert from "node:assert/strict";
import { explainGuide } from "../../../models/decision/mod.ts";
import { assertClose } from "../../assert_close.ts";
import { guide, ktp, request, trait, TYPE_II } from "./a_guide.ts";

const doubled = (require: object[]) =>
  request({ process: "second-harmonic", polarisations: TYPE_II, signal: { wavelength_nm: 1582 }, require });
const SIZE = { draws: 1024, spectral: 64 };

Deno.test("explainGuide() gives the shares of a model that is all but linear, and 0 to a trait without u", () => {
  // The survival of a pair's photon falls with both losses, nearly on a straight line for so little of it.
  const checked = request({
    process: "pair-generation",
    polarisations: TYPE_II,
    pump: { wavelength_nm: 791, fwhm_ps: 1, average_power_mw: 0.1, repetition_mhz: 76 },
    signal: { wavelength_nm: 1582 },
    idler: { wavelength_nm: 1582 },
  });
  const made = {
    ...guide,
    signal: { ...guide.signal, loss: trait(0.5, 0.06, "s") },
    idler: { ...guide.idler, loss: trait(0.5, 0.08, "i") },
  };
  const { figures } = explainGuide(ktp, checked, made, {
    recorded: null,
    size: SIZE,
    figures: ["survival_signal", "loss_db_cm_idler"],
  });
  const [survival, idler] = ["survival_signal", "loss_db_cm_idler"].map((name) =>
    figures.find((f) => f.figure === name)!
  );
  assert.equal(idler!.traits.length, 1);
  assertClose(idler!.traits[0]!.share, 1, { abs: 0.01 });
  assertClose(idler!.uLinear!, 0.08, { rel: 1e-9 });
  const by = new Map(survival!.traits.map((t) => [t.key, t]));
  // u²·slope² of each trait over the whole: what the linear law says of independent traits.
  const parts = survival!.traits.map((t) => (t.u * (t.slope ?? 0)) ** 2);
  const whole = parts.reduce((a, b) => a + b, 0);
  survival!.traits.forEach((t, k) => assertClose(t.share, parts[k]! / whole, { abs: 0.05 }, t.key));
  assert.equal(by.get("pump loss")!.u, 0);
  assert.deepEqual([by.get("pump loss")!.share, by.get("pump loss")!.slope], [0, null]);
  const sum = survival!.traits.reduce((s, t) => s + t.share, 0);
  assert.ok(sum <= 1 + survival!.traits.length * survival!.resolution!, String(sum));
});

Deno.test("explainGuide() says how far a figure is from its limits in units of u, and how far it would have to be", () => {
  const made = { ...guide, signal: { ...guide.signal, loss: trait(0.5, 0.05, "s") } };
  const { figures, decision } = explainGuide(
    ktp,
    doubled([{ figure: "loss_db_cm_signal", at_least: 0.3, at_most: 0.55 }]),
    made,
    { recorded: null, size: SIZE },
  );
  const [loss] = figures;
  assert.deepEqual(figures.map((f) => f.figure), ["loss_db_cm_signal"]);
  assert.equal(decision, "hold");
  assert.deepEqual(loss!.limits.map((l) => [l.kind, l.limit]), [["at_least", 0.3], ["at_most", 0.55]]);
  assertClose(loss!.limits[0]!.margin_u!, 4, { abs: 0.1 });
  assertClose(loss!.limits[1]!.margin_u!, 1, { abs: 0.05 });
  // Φ⁻¹(0.9), as JCGM 106:2012, 8.3 has it for a one-sided guard band.
  assertClose(loss!.limits[1]!.guard_u!, 1.2815515655446004, { rel: 1e-9 });
  assertClose(loss!.probability!, 0.8413, { abs: 0.01 });
});

Deno.test("explainGuide() finds the trait that a spectrum follows, although later draws repeat the spectra", () => {
  const checked = doubled([{ figure: "efficiency_percent_per_w", at_least: 0.01 }]);
  const made = {
    ...guide,
    signal: { ...guide.signal, loss: trait(0.5, 0, "s") },
    idler: { ...guide.idler, loss: trait(0.5, 0, "i") },
    poling: {
      from: "duty" as const,
      duty: trait(0.5, 0, "duty"),
      dutySd: trait(0, 0, "duty_sd"),
      merged: trait(0.1, 0.03, "merged"),
    },
  };
  const { figures: [found] } = explainGuide(ktp, checked, made, {
    recorded: null,
    size: { draws: 512, spectral: 128 },
  });
  assert.equal(found!.traits[0]!.key, "merged");
  assert.ok(found!.traits[0]!.share > 0.5, String(found!.traits[0]!.share));
  // Fewer domains, less efficiency.
  assert.ok(found!.traits[0]!.slope! < 0);
});
