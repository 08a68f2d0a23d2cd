import assert from "node:assert/strict";
import fc from "fast-check";
import {
  bulkIndexModel,
  type IndexTableRow,
  mismatch,
  mismatchOverTemperature,
  tableIndexModel,
} from "../../../models/guides/mod.ts";
import { groupIndex, refractiveIndex } from "../../../models/materials/mod.ts";
import type { GuideGeometry, Polarisation } from "../../../shared/vocabulary.ts";
import { assertClose } from "../../assert_close.ts";

const AXES = { TE: "y", TM: "z" } as const;

/** An invented excess index over bulk, of the size and curvature of real guides. λ in µm. */
function excess(L: number, T: number, { width_um: w, titanium_nm: t = 100 }: GuideGeometry): number {
  return 0.012 * Math.exp(-1.1 * L) * (1 + 0.0008 * (T - 25) + 1e-6 * (T - 25) ** 2) *
    (1 - Math.exp(-w / 4)) *
    (0.5 + t / 200);
}
const excessSlope = (L: number, T: number, g: GuideGeometry): number => -1.1 * excess(L, T, g);

function table(
  options: {
    wavelengths?: number[];
    temperatures?: number[];
    widths?: number[];
    strips?: number[];
    pols?: Polarisation[];
  } = {},
): IndexTableRow[] {
  const {
    wavelengths = Array.from({ length: 22 }, (_, k) => 700 + 50 * k),
    temperatures = [15, 50, 90, 130],
    widths = [5, 6, 7, 8, 9],
    strips,
    pols = ["TE", "TM"],
  } = options;
  const rows: IndexTableRow[] = [];
  for (const polarisation of pols) {
    for (const wavelength_nm of wavelengths) {
      for (const temperature_c of temperatures) {
        for (const width_um of widths) {
          for (const titanium_nm of strips ?? [undefined]) {
            const geometry = titanium_nm === undefined ? { width_um } : { width_um, titanium_nm };
            const n_eff = excess(wavelength_nm / 1000, temperature_c, geometry) +
              refractiveIndex("CLN", AXES[polarisation], wavelength_nm * 1e-9, temperature_c);
            rows.push({ polarisation, wavelength_nm, temperature_c, width_um, titanium_nm, n_eff });
          }
        }
      }
    }
  }
  return rows;
}
const model = tableIndexModel(table({ strips: [80, 90, 100] }), "CLN", AXES);
const middle = { width_um: 6.37, titanium_nm: 93 };

Deno.test("a table gives its own nodes back", () => {
  for (const row of table({ strips: [80, 90, 100] }).filter((_, k) => k % 37 === 0)) {
    const geometry = { width_um: row.width_um, titanium_nm: row.titanium_nm! };
    assertClose(
      model.nEff(row.polarisation, row.wavelength_nm * 1e-9, row.temperature_c, geometry),
      row.n_eff,
      { abs: 1e-14 },
    );
  }
});

Deno.test("the order of the rows does not matter", () => {
  const rows = table();
  const shuffled = rows.map((row, k) => [(k * 7919) % 104729, row] as const).sort((a, b) => a[0] - b[0])
    .map(([, row]) => row);
  const at = (m: typeof model) => m.nEff("TM", 1.234e-6, 33, { width_um: 5.5 });
  assert.equal(at(tableIndexModel(shuffled, "CLN", AXES)), at(tableIndexModel(rows, "CLN", AXES)));
});

Deno.test("between its nodes a table keeps the index to 2e-6 and the group index to 1e-5", () => {
  fc.assert(fc.property(
    fc.constantFrom<Polarisation>("TE", "TM"),
    fc.double({ min: 0.7, max: 1.75, noNaN: true }),
    fc.double({ min: 15, max: 130, noNaN: true }),
    fc.double({ min: 5, max: 9, noNaN: true }),
    fc.double({ min: 80, max: 100, noNaN: true }),
    (pol, L, T, width_um, titanium_nm) => {
      const geometry = { width_um, titanium_nm };
      const n = excess(L, T, geometry) + refractiveIndex("CLN", AXES[pol], L * 1e-6, T);
      const ng = excess(L, T, geometry) - L * excessSlope(L, T, geometry) +
        groupIndex("CLN", AXES[pol], L * 1e-6, T);
      assertClose(model.nEff(pol, L * 1e-6, T, geometry), n, { abs: 2e-6 });
      assertClose(model.groupIndex(pol, L * 1e-6, T, geometry), ng, { abs: 1e-5 });
    },
  ));
});

Deno.test("slices agree with single questions", () => {
  fc.assert(fc.property(
    fc.double({ min: 0.7e-6, max: 1.75e-6, noNaN: true }),
    fc.double({ min: 15, max: 130, noNaN: true }),
    (lambda, T) => {
      const slice = model.slice("TE", T, middle);
      assertClose(slice.n(lambda), model.nEff("TE", lambda, T, middle), { abs: 1e-14 });
      assertClose(slice.ng(lambda), model.groupIndex("TE", lambda, T, middle), { abs: 1e-12 });
      assertClose(
        model.overTemperature("TE", lambda, middle)(T),
        model.nEff("TE", lambda, T, middle),
        { abs: 1e-14 },
      );
    },
  ));
});

Deno.test("the mismatch over temperature is the mismatch, for a table and for bulk", () => {
  const waves = { lambdaP: 0.8e-6, lambdaS: 1.55e-6, lambdaI: 1 / (1 / 0.8e-6 - 1 / 1.55e-6) };
  const type2 = { ...waves, polP: "TE", polS: "TE", polI: "TM" } as const;
  for (const index of [model, bulkIndexModel("KTP", AXES)]) {
    const f = mismatchOverTemperature(index, type2, middle);
    for (const T of [15, 31.4, 130]) assertClose(f(T), mismatch(index, type2, T, middle), { rel: 1e-10 });
  }
});

Deno.test("curvature in wavelength and temperature is continuous across a node", () => {
  const bend = (f: (x: number) => number, x: number, h: number) => (f(x + h) - 2 * f(x) + f(x - h)) / (h * h);
  const overL = (l: number) => model.nEff("TM", l, 40, middle) - refractiveIndex("CLN", "z", l, 40);
  const h = 1e-9;
  assertClose(bend(overL, 1e-6 - 2 * h, h), bend(overL, 1e-6 + 2 * h, h), { rel: 0.02 });
  const overT = (T: number) => model.nEff("TM", 1e-6, T, middle) - refractiveIndex("CLN", "z", 1e-6, T);
  assertClose(bend(overT, 48, 1), bend(overT, 52, 1), { rel: 0.02 });
});

Deno.test("the sensitivity is the slope of the index in each parameter, continuous across a node, and 0 for others", () => {
  const n = (width_um: number, titanium_nm: number) =>
    model.nEff("TM", 1.55e-6, 40, { width_um, titanium_nm });
  const at = (geometry: GuideGeometry, p: "width_um" | "titanium_nm" | "etch_depth_nm") =>
    model.sensitivity("TM", 1.55e-6, 40, geometry, p);
  const h = 1e-4;
  assertClose(at(middle, "width_um"), (n(6.37 + h, 93) - n(6.37 - h, 93)) / (2 * h), { rel: 1e-6 });
  assertClose(at(middle, "titanium_nm"), (n(6.37, 93 + h) - n(6.37, 93 - h)) / (2 * h), { rel: 1e-5 });
  assert.equal(at(middle, "etch_depth_nm"), 0);
  const node = (w: number) => at({ width_um: w, titanium_nm: 93 }, "width_um");
  assertClose(node(7 - 1e-9), node(7 + 1e-9), { rel: 1e-6 });
  // The invented excess: ∂/∂w = excess·e^(−w/4)/(4(1 − e^(−w/4))).
  const truth = excess(1.55, 40, middle) * Math.exp(-6.37 / 4) / (4 * (1 - Math.exp(-6.37 / 4)));
  assertClose(at(middle, "width_um"), truth, { rel: 0.02 });
  assert.equal(model.sensitivity("TM", 1.55e-6, 40, { width_um: 9, titanium_nm: 100 }, "width_um") > 0, true);
});

Deno.test("nothing is answered beyond the table, and the error names quantity and limits", () => {
  const ask = (lambda: number, T: number, geometry: GuideGeometry) => () =>
    model.nEff("TE", lambda, T, geometry);
  assert.throws(ask(0.69e-6, 40, middle), /RangeError.*wavelength_nm 690, need 700 to 1750/);
  assert.throws(ask(1e-6, 14.9, middle), /RangeError.*temperature_c 14\.9, need 15 to 130/);
  assert.throws(ask(1e-6, 40, { ...middle, width_um: 9.01 }), /RangeError.*width_um 9\.01, need 5 to 9/);
  assert.throws(ask(1e-6, 40, { ...middle, titanium_nm: 79 }), /RangeError.*titanium_nm 79, need 80 to 100/);
  assert.throws(ask(NaN, 40, middle), RangeError);
  assert.throws(ask(1e-6, NaN, middle), RangeError);
  assert.throws(ask(1e-6, 40, { ...middle, width_um: NaN }), RangeError);
  assert.throws(() => model.slice("TE", 131, middle), RangeError);
  assert.throws(() => model.slice("TE", 40, middle).ng(1.8e-6), RangeError);
  assert.throws(() => model.overTemperature("TE", 1.8e-6, middle), RangeError);
  assert.throws(() => model.overTemperature("TE", 1e-6, middle)(200), RangeError);
  assert.deepEqual(model.range("TE"), {
    lambda: [700 * 1e-9, 1750 * 1e-9],
    temperatureC: [15, 130],
    width_um: [5, 9],
    titanium_nm: [80, 100],
  });
});

Deno.test("a parameter that a guide does not state is refused, unless a nominal value or a single node stands in", () => {
  assert.throws(
    () => model.nEff("TE", 1e-6, 40, { width_um: 7 }),
    /RangeError.*titanium_nm is not known, need 80 to 100/,
  );
  const withNominal = tableIndexModel(table({ strips: [80, 90, 100] }), "CLN", AXES, { titanium_nm: 93 });
  assert.equal(
    withNominal.nEff("TE", 1e-6, 40, { width_um: 6.37 }),
    model.nEff("TE", 1e-6, 40, middle),
  );
  assert.notEqual(
    withNominal.nEff("TE", 1e-6, 40, { width_um: 6.37, titanium_nm: 90 }),
    model.nEff("TE", 1e-6, 40, middle),
    "the guide's own value goes first",
  );
  const single = tableIndexModel(table({ strips: [90] }), "CLN", AXES);
  assert.ok(single.nEff("TE", 1e-6, 40, { width_um: 7 }) > 2);
  assert.throws(
    () => single.nEff("TE", 1e-6, 40, { width_um: 7, titanium_nm: 91 }),
    /titanium_nm 91, need 90 \(the table has this value only\)/,
  );
});

Deno.test("a hole in the grid is refused, naming the node that is missing", () => {
  const rows = table({ pols: ["TM"] }).filter((r) =>
    !(r.wavelength_nm === 1200 && r.temperature_c === 90 && r.width_um === 6)
  );
  assert.throws(
    () => tableIndexModel(rows, "CLN", AXES),
    /RangeError.*index table \(TM\).*width_um = 6, temperature_c = 90, wavelength_nm = 1200 \(1 of 440 missing\)/,
  );
});

Deno.test("a node given twice is refused if the values differ, and taken if they agree", () => {
  const rows = table();
  assert.doesNotThrow(() => tableIndexModel([...rows, rows[5]!], "CLN", AXES));
  assert.throws(
    () => tableIndexModel([...rows, { ...rows[5]!, n_eff: 2.2 }], "CLN", AXES),
    /RangeError.*is given twice, as 2\.\d+ and 2\.2/,
  );
});

Deno.test("an empty table, a missing cell, an impossible index and a node without bulk index are refused", () => {
  assert.throws(() => tableIndexModel([], "CLN", AXES), /RangeError.*no row/);
  const rows = table({ strips: [80, 90] });
  const { titanium_nm: _, ...bare } = rows[3]!;
  assert.throws(
    () => tableIndexModel([...rows, bare], "CLN", AXES),
    /RangeError.*no value in column titanium_nm/,
  );
  assert.throws(() => tableIndexModel([{ ...rows[0]!, n_eff: 0.9 }], "CLN", AXES), /RangeError.*n_eff 0\.9/);
  assert.throws(() => tableIndexModel([{ ...rows[0]!, n_eff: NaN }], "CLN", AXES), /RangeError.*NaN/);
  assert.throws(
    () => tableIndexModel([{ ...rows[0]!, wavelength_nm: 350 }], "CLN", AXES),
    /RangeError.*350 nm/,
  );
});

Deno.test("a polarisation without rows is refused when it is asked for", () => {
  const te = tableIndexModel(table({ pols: ["TE"] }), "CLN", AXES);
  assert.doesNotThrow(() => te.nEff("TE", 1e-6, 40, { width_um: 7 }));
  assert.throws(() => te.nEff("TM", 1e-6, 40, { width_um: 7 }), /RangeError.*no rows of polarisation TM/);
});

Deno.test("one node makes an axis a point, two a line, three a parabola", () => {
  const at = (m: typeof model, L: number, T: number, w: number) =>
    m.nEff("TM", L * 1e-6, T, { width_um: w }) - refractiveIndex("CLN", "z", L * 1e-6, T);
  const cases = [[15], [15, 130], [15, 70, 130]];
  for (const temperatures of cases) {
    const m = tableIndexModel(table({ temperatures }), "CLN", AXES);
    const T = temperatures.length === 1 ? 15 : 100;
    // Lagrange's polynomial through the nodes.
    let expected = 0;
    for (const node of temperatures) {
      let w = 1;
      for (const other of temperatures) if (other !== node) w *= (T - other) / (node - other);
      expected += w * excess(1, node, { width_um: 7 });
    }
    assertClose(at(m, 1, T, 7), expected, { abs: 1e-14 }, `${temperatures.length} nodes`);
    if (temperatures.length === 1) assert.throws(() => at(m, 1, 16, 7), RangeError);
  }
  const short = tableIndexModel(table({ wavelengths: [1500, 1600], widths: [7] }), "CLN", AXES);
  assertClose(
    at(short, 1.525, 50, 7),
    0.75 * excess(1.5, 50, { width_um: 7 }) + 0.25 * excess(1.6, 50, { width_um: 7 }),
    { abs: 1e-14 },
  );
  const point = tableIndexModel(table({ wavelengths: [1550], widths: [7] }), "CLN", AXES);
  assertClose(at(point, 1.55, 50, 7), excess(1.55, 50, { width_um: 7 }), { abs: 1e-15 });
});

Deno.test("a table of bulk indices is bulk: the excess vanishes everywhere", () => {
  const rows = table().map((r) => ({
    ...r,
    n_eff: refractiveIndex("CLN", AXES[r.polarisation], r.wavelength_nm * 1e-9, r.temperature_c),
  }));
  const flat = tableIndexModel(rows, "CLN", AXES);
  for (const L of [0.71e-6, 1.013e-6, 1.733e-6]) {
    assertClose(flat.nEff("TM", L, 77, { width_um: 5.1 }), refractiveIndex("CLN", "z", L, 77), {
      abs: 1e-14,
    });
    assertClose(flat.groupIndex("TM", L, 77, { width_um: 5.1 }), groupIndex("CLN", "z", L, 77), {
      abs: 1e-12,
    });
  }
});
