import assert from "node:assert/strict";
import { type Ridge, ridgeArea, ridgeMode, silicaIndex } from "../../../models/guides/ridge.ts";
import { slabIndex } from "../../../models/guides/slab.ts";
import { erfc, exchangedIndex, exchangedMode } from "../../../models/guides/rubidium_profile.ts";
import { separableArea } from "../../../models/guides/effective_index.ts";
import { assertClose } from "../../assert_close.ts";

const ridge: Ridge = {
  film: 2.138,
  buffer: 1.444,
  cover: 1,
  filmThickness: 600e-9,
  etchDepth: 350e-9,
  width: 1.4e-6,
};

// Malitson (1965): n_d = 1.45846 and n(1.55 µm) = 1.44402, from memory.
Deno.test("silica has its handbook indices", () => {
  assertClose(silicaIndex(587.5618e-9), 1.45846, { abs: 1e-5 });
  assertClose(silicaIndex(1550e-9), 1.44402, { abs: 1e-5 });
});

Deno.test("a very wide ridge is the film's slab, and a narrower one has a lower index", () => {
  for (const pol of ["TE", "TM"] as const) {
    const film = slabIndex({ core: 2.138, substrate: 1.444, cover: 1, thickness: 600e-9 }, pol, 1.55e-6)!;
    assertClose(ridgeMode({ ...ridge, width: 200e-6 }, pol, 1.55e-6)!.index, film, { abs: 1e-5 });
    const [narrow, wide] = [1e-6, 1.5e-6].map((width) => ridgeMode({ ...ridge, width }, pol, 1.55e-6)!.index);
    assert.ok(narrow! < wide! && wide! < film);
  }
});

Deno.test("a shallow etch changes little", () => {
  const film = slabIndex({ core: 2.138, substrate: 1.444, cover: 1, thickness: 600e-9 }, "TE", 1.55e-6)!;
  const shallow = ridgeMode({ ...ridge, etchDepth: 1e-9, width: 5e-6 }, "TE", 1.55e-6)!.index;
  assertClose(shallow, film, { abs: 1e-3 });
});

Deno.test("an etch through the film is refused", () => {
  assert.throws(
    () => ridgeMode({ ...ridge, etchDepth: 600e-9 }, "TE", 1.55e-6),
    /RangeError.*0 < etch depth/,
  );
});

Deno.test("the field across a wall jumps by the ratio of the squared indices and keeps its flux", () => {
  const mode = ridgeMode(ridge, "TM", 1.55e-6)!;
  const d = 1e-13;
  assertClose(mode.height(-d) / mode.height(d), (2.138 / 1.444) ** 2, { rel: 1e-5 });
  assertClose(mode.lateral(0.7e-6 + d), mode.lateral(0.7e-6 - d), { rel: 1e-5 });
  assertClose(mode.lateral(-0.4e-6), mode.lateral(0.4e-6), { rel: 1e-9 });
});

Deno.test("the area of three like modes tends to (9π²/128)² × width × height where the walls are hard", () => {
  // cos profiles both ways: ∫cos³/(∫cos²)^1.5 squared is 128/(9π²w).
  const guide = { ...ridge, width: 40e-6, filmThickness: 20e-6, etchDepth: 19.95e-6 };
  const mode = ridgeMode(guide, "TE", 1.55e-6)!;
  const hard = (9 * Math.PI ** 2 / 128) ** 2 * 40e-6 * 20e-6;
  assertClose(ridgeArea(guide, mode, mode, mode), hard, { rel: 0.03 });
});

Deno.test("the area of a real ridge grows with its width", () => {
  const area = (width: number) => {
    const guide = { ...ridge, width };
    const mode = ridgeMode(guide, "TE", 1.55e-6)!;
    return ridgeArea(guide, mode, mode, mode);
  };
  assert.ok(area(1.4e-6) < area(2e-6) && area(2e-6) < area(4e-6));
});

Deno.test("erfc keeps its tail", () => {
  assertClose(erfc(0), 1, { rel: 1e-14 });
  assertClose(erfc(1), 0.15729920705028513, { rel: 1e-12 });
  assertClose(erfc(5), 1.5374597944280349e-12, { rel: 1e-9 });
});

Deno.test("an exchanged guide lies between crystal and surface, grows with width, and fades with its step", () => {
  const guide = { substrate: 1.73, cover: 1, step: 0.015, depth: 8e-6, width: 3e-6 };
  const at = (change: Partial<typeof guide>) => exchangedIndex({ ...guide, ...change }, 1.58e-6);
  assert.ok(at({})! > 1.73 && at({})! < 1.745);
  assert.ok(at({ width: 4e-6 })! > at({})!);
  assert.ok(at({ step: 0.01 })! < at({})!);
  assert.equal(at({ step: 1e-4 }), null);
  assert.equal(exchangedMode({ ...guide, step: 1e-4 }, 1.58e-6), null);
});

Deno.test("the area of an exchanged guide is that of its fields: independent sums agree", () => {
  const guide = { substrate: 1.73, cover: 1, step: 0.015, depth: 8e-6, width: 3e-6 };
  const mode = exchangedMode(guide, 1.58e-6)!;
  const sums = { two: 0, three: 0 };
  // A plain double loop over the product field, every fourth node.
  for (let j = 0; j < mode.lateral.field.length; j += 4) {
    for (let k = 0; k < mode.depth.field.length; k += 4) {
      const e = mode.lateral.field[j]! * mode.depth.field[k]! * (j === 0 ? 0.5 : 1);
      const full = mode.lateral.field[j]! * mode.depth.field[k]!;
      sums.two += e * full;
      sums.three += e * full * full;
    }
  }
  const cell = 2 * 16 * mode.lateral.step * mode.depth.step;
  const area = (sums.two * cell) ** 3 / (sums.three * cell) ** 2;
  assertClose(separableArea(mode, mode, mode), area, { rel: 2e-3 });
});
