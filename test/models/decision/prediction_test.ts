// Whole predictions of one guide: what has to hold between its figures.
import { deepEqual, equal, match, ok } from "node:assert/strict";
import { assert, double, property, record } from "fast-check";
import { type GuideInputs, type GuidePrediction, predictGuide } from "../../../models/decision/mod.ts";
import { type Figure, figureAbsence, FIGURES } from "../../../shared/schemas/figures.ts";
import { assertClose } from "../../assert_close.ts";
import { guide, ktp, request, trait, TYPE_II } from "./a_guide.ts";

const PAIRS = {
  process: "pair-generation",
  polarisations: TYPE_II,
  pump: { wavelength_nm: 791, fwhm_ps: 1, average_power_mw: 0.1, repetition_mhz: 76 },
  signal: {
    wavelength_nm: 1582,
    fibre_mfd_um: 10.4,
    filter: { shape: "flat-top", fwhm_nm: 12, peak: 0.97 },
    detector: { efficiency: 0.85, dark_hz: 100 },
  },
  idler: { wavelength_nm: 1582, fibre_mfd_um: 10.4, detector: { efficiency: 0.7, dark_hz: 100 } },
};
const DOUBLE = {
  process: "second-harmonic",
  polarisations: TYPE_II,
  signal: { wavelength_nm: 1582, average_power_mw: 20 },
};
/** Short guides: fewer domains, the same physics. */
const short: GuideInputs = { ...guide, length: 0.008, poledFrom: 5e-4, poledLength: 0.007 };
const predict = (fields: Record<string, unknown>, of: GuideInputs = short) =>
  predictGuide(ktp, request(fields), of, { recorded: null });
const figure = (of: GuidePrediction, name: Figure) => of.figures.find((f) => f.figure === name)!;
const mean = (of: GuidePrediction, name: Figure): number => {
  const { mean, reason } = figure(of, name);
  ok(mean !== null, `${name}: ${reason}`);
  return mean;
};
const pumped = (over: object) => ({ ...PAIRS, pump: { ...PAIRS.pump, ...over } });

Deno.test("every prediction has the figures of its process, ordered, with mean and quantiles that agree", () => {
  for (const fields of [PAIRS, DOUBLE]) {
    const made = predict(fields);
    const expected = FIGURES.filter((f) =>
      figureAbsence(f, fields.process as "second-harmonic", true) === null
    );
    deepEqual(made.figures.map((f) => f.figure), expected);
    for (const { figure, mean, u, lo, hi, reason } of made.figures) {
      if (mean === null) {
        deepEqual([u, lo, hi], [null, null, null]);
        ok(reason !== null && reason.length > 5, figure);
        continue;
      }
      ok(lo! <= mean && mean <= hi!, `${figure}: ${mean} in ${lo}…${hi}`);
      ok(u! >= 0 && hi! - lo! <= 6 * u! + 1e-12, `${figure}: u ${u}`);
    }
  }
});

Deno.test("the same guide and request give the same numbers to the bit, another guide's id other draws", () => {
  deepEqual(predict(PAIRS), predict(PAIRS));
  const other = predict(PAIRS, { ...short, id: "A/01/g2" });
  ok(mean(other, "heralding_signal") !== mean(predict(PAIRS), "heralding_signal"));
});

Deno.test("pairs go with the pump power; purity, heralding and windows do not", () => {
  const [one, three] = [predict(PAIRS), predict(pumped({ average_power_mw: 0.3 }))];
  assertClose(mean(three, "pairs_per_pulse"), 3 * mean(one, "pairs_per_pulse"), { rel: 1e-9 });
  for (
    const name of [
      "purity",
      "heralding_signal",
      "heralding_idler",
      "window_signal_nm",
      "bandwidth_idler_nm",
    ] as const
  ) {
    assertClose(mean(three, name), mean(one, name), { rel: 1e-12 }, name);
  }
  ok(mean(three, "g2_heralded") > 2.9 * mean(one, "g2_heralded"));
});

Deno.test("a signal arm's own loss moves its budget and no spectral figure", () => {
  const dark: GuideInputs = { ...short, signal: { ...short.signal, loss: trait(3, 0, "dark") } };
  const [clear, lossy] = [predict(PAIRS), predict(PAIRS, dark)];
  for (
    const name of [
      "purity",
      "schmidt_number",
      "pairs_per_pulse",
      "exchange_overlap",
      "bandwidth_signal_nm",
      "filter_signal",
      "operating_temperature_c",
    ] as const
  ) assertClose(mean(lossy, name), mean(clear, name), { rel: 1e-12 }, name);
  ok(mean(lossy, "survival_signal") < 0.85 * mean(clear, "survival_signal"));
});

Deno.test("a heralding efficiency is the product of its factors, and each lies in 0…1", () => {
  assert(
    property(
      record({
        loss: double({ min: 0, max: 4, noNaN: true }),
        mode: double({ min: 2, max: 20, noNaN: true }),
        reflectivity: double({ min: 0, max: 0.5, noNaN: true }),
      }),
      ({ loss, mode, reflectivity }) => {
        const arm = {
          loss: trait(loss, 0, "l"),
          mode: { x: trait(mode, 0, "x"), y: trait(mode, 0, "y") },
          facet: { state: "coated" as const, reflectivity: trait(reflectivity, 0, "r") },
        };
        // No root: the budget alone is computed, which is quick.
        const made = predict(PAIRS, { ...short, period: 46.9e-6, signal: arm });
        const factors = (["survival", "facet", "coupling", "filter", "detector"] as const)
          .map((f) => mean(made, `${f}_signal`));
        for (const f of factors) ok(f > 0 && f <= 1);
        assertClose(mean(made, "heralding_signal"), factors.reduce((a, b) => a * b), { rel: 1e-9 });
        assertClose(mean(made, "facet_signal"), 1 - reflectivity, { rel: 1e-12 });
        equal(mean(made, "detector_signal"), 0.85);
      },
    ),
    { numRuns: 6 },
  );
});

Deno.test("probabilities: 0…1, the joint one at most the smallest, and all draws counted", () => {
  const middle = mean(predict(PAIRS), "heralding_signal");
  const made = predict({
    ...PAIRS,
    require: [{ figure: "heralding_signal", at_least: middle }, { figure: "purity", at_least: 0.2 }],
  });
  const [p, q] = [figure(made, "heralding_signal").probability!, figure(made, "purity").probability!];
  ok(p > 0.3 && p < 0.7, `${p}`);
  equal(q, 1);
  equal(made.probability, p);
  equal(made.limitedBy, "heralding_signal");
  equal(made.decision, "hold");
  equal(made.matched, 1);
  equal(predict({ ...PAIRS, require: [{ figure: "purity", at_most: 0.2 }] }).decision, "reject");
  const none = predict(PAIRS);
  deepEqual(
    [none.probability, none.decision, none.limitedBy],
    [1, "accept", null],
    "nothing asked, nothing missed",
  );
});

Deno.test("a wider u of a loss widens what rests on it and leaves the rest", () => {
  const sharp: GuideInputs = { ...short, signal: { ...short.signal, loss: trait(1.5, 0.01, "l") } };
  const blunt: GuideInputs = { ...short, signal: { ...short.signal, loss: trait(1.5, 0.2, "l") } };
  const [a, b] = [predict(PAIRS, sharp), predict(PAIRS, blunt)];
  assertClose(figure(b, "survival_signal").u! / figure(a, "survival_signal").u!, 20, { rel: 0.2 });
  // Linear propagation: dη/η of the loss over the mean way to the facet, about half the guide.
  const way = 0.008 - (5e-4 + 0.0035);
  assertClose(
    figure(b, "survival_signal").u! / mean(b, "survival_signal"),
    0.2 * 10 * Math.LN10 * way,
    { rel: 0.1 },
  );
  deepEqual(figure(a, "facet_signal"), figure(b, "facet_signal"));
});

Deno.test("without a root: the budget stands, everything of the light itself is null with the reason", () => {
  for (
    const [fields, gone] of [
      [PAIRS, [
        "purity",
        "schmidt_number",
        "pairs_per_pulse",
        "g2_heralded",
        "g2_unheralded",
        "car",
        "exchange_overlap",
      ]],
      [DOUBLE, ["peak_conversion"]],
    ] as const
  ) {
    const made = predict({ ...fields, require: [{ figure: "efficiency_percent_per_w", at_least: 0 }] }, {
      ...short,
      period: 46.9e-6,
    });
    for (
      const name of [
        ...gone,
        "efficiency_percent_per_w",
        "efficiency_percent_per_w_cm2",
        "acceptance_nm",
        "operating_pump_nm",
      ] as const
    ) {
      const { mean, reason } = figure(made, name);
      equal(mean, null, name);
      match(reason!, /no phase matching within the oven's 20–90 °C/, name);
    }
    deepEqual([made.probability, made.matched, made.decision], [0, 0, "reject"]);
    equal(mean(made, "operating_temperature_c"), 20);
    ok(mean(made, "loss_db_cm_signal") > 0);
  }
});

Deno.test("a guide that is not poled, and a process that the platform does not know, say so", () => {
  const unpoled = predict(PAIRS, { ...short, poledLength: 0 });
  deepEqual(
    [unpoled.decision, unpoled.probability],
    ["reject", 0],
    "it makes nothing, though nothing is asked",
  );
  for (const name of ["purity", "operating_temperature_c", "heralding_signal"] as const) {
    deepEqual([figure(unpoled, name).mean, figure(unpoled, name).reason], [null, "the guide is not poled"]);
  }
  ok(mean(unpoled, "loss_db_cm_idler") > 0);
  // TM > TE + TE is matched at some period, but bulk-ktp has no coefficient for it.
  const made = predict({ ...DOUBLE, polarisations: { pump: "TM", signal: "TE", idler: "TE" } }, {
    ...short,
    period: 10.4e-6,
  });
  equal(figure(made, "efficiency_percent_per_w").mean, null);
  match(
    figure(made, "efficiency_percent_per_w").reason!,
    /no nonlinear coefficient for TM>TE\+TE \(it has TE>TE\+TM, TM>TM\+TM\)/,
  );
});

Deno.test("an unknown mode size leaves coupling and heralding of that arm null with the reason, not 1", () => {
  const made = predict(PAIRS, {
    ...short,
    period: 46.9e-6,
    signal: { ...short.signal, mode: { reason: "no mode size is known" } },
  });
  for (const name of ["coupling_signal", "heralding_signal"] as const) {
    equal(figure(made, name).mean, null);
    match(figure(made, name).reason!, /no mode size is known/);
  }
  ok(mean(made, "coupling_idler") < 1);
});

Deno.test("a second harmonic in pairs' clothes: the efficiency of a pair source is that of its reverse", () => {
  const lossless: GuideInputs = {
    ...short,
    pumpLoss: trait(0.4, 0, "p"),
    signal: { ...short.signal, loss: trait(0.5, 0, "s") },
    idler: { ...short.idler, loss: trait(0.6, 0, "i") },
  };
  const [pairs, double] = [predict(PAIRS, lossless), predict(DOUBLE, lossless)];
  for (const name of ["efficiency_percent_per_w", "operating_temperature_c"] as const) {
    assertClose(mean(pairs, name), mean(double, name), { rel: 1e-9 }, name);
  }
  const cm = 0.7;
  const { mean: perCm2 } = figure(double, "efficiency_percent_per_w_cm2");
  assertClose(
    perCm2! * cm * cm,
    mean(double, "efficiency_percent_per_w"),
    { rel: 2e-3 },
    "length of 25 °C or of the oven",
  );
  // Twice the poled length, four times the efficiency, but for the loss.
  const twice = predict(DOUBLE, { ...lossless, length: 0.016, poledLength: 0.014 });
  const gain = mean(twice, "efficiency_percent_per_w") / mean(double, "efficiency_percent_per_w");
  ok(gain > 3 && gain < 4.05, `${gain}`);
});
