import assert from "node:assert/strict";
import { fisherExact } from "../../../../models/decision/suspects/fisher.ts";
import { suspects, type TracedUnit } from "../../../../models/decision/suspects/suspects.ts";
import { randomFrom } from "../../../../shared/random.ts";
import { assertClose } from "../../../assert_close.ts";

const wafer = (id: string, attributes: Record<string, string | null>, within: string[] = []): TracedUnit => ({
  id,
  within,
  attributes,
});

/** Dies d0…d(count−1) of wafers that share their attributes. */
const dies = (id: string, count: number, attributes: Record<string, string | null>, lot = "L1") =>
  Array.from({ length: count }, (_, i) => wafer(`${id}/d${i}`, attributes, [id, lot]));

Deno.test("suspects() blames the tool that the affected wafers share", () => {
  const tool = (i: number) => i < 6 ? "evap-1" : "evap-2";
  const wafers = Array.from(
    { length: 16 },
    (_, i) => wafer(`W${i}`, { deposition: tool(i), etch: `etch-${i % 2}` }),
  );
  const report = suspects(wafers.slice(0, 6), wafers.slice(6));
  const [first] = report.results;
  assert.deepEqual(first!.names, [{ attribute: "deposition", value: "evap-1" }]);
  assert.equal(first!.verdict, "suspect");
  assertClose(
    first!.pValue,
    fisherExact({ affectedWith: 6, affectedWithout: 0, unaffectedWith: 0, unaffectedWithout: 10 }).over,
    {
      rel: 1e-9,
    },
  );
  assert.equal(report.tried, 4);
  assertClose(first!.corrected, 4 * first!.pValue, { rel: 1e-12 });
  assert.deepEqual(report.results.filter((r) => r.verdict === "suspect").length, 1);
  assert.deepEqual([first!.affectedWith, first!.affected, first!.unaffectedWith, first!.unaffected], [
    6,
    6,
    0,
    10,
  ]);
});

Deno.test("suspects() counts what the same units carried as one hypothesis and says so", () => {
  const wafers = Array.from(
    { length: 14 },
    (_, i) => wafer(`W${i}`, { substrate: i < 5 ? "S-1" : "S-2", recipe: i < 5 ? "R7" : "R8", clean: "all" }),
  );
  const report = suspects(wafers.slice(0, 5), wafers.slice(5));
  assert.equal(report.tried, 2);
  assert.deepEqual(report.results[0]!.names.map((n) => n.value), ["R7", "S-1"]);
  assert.deepEqual(report.uniform, [{ attribute: "clean", value: "all" }]);
  assert.deepEqual(report.remarks.slice(0, 1), [
    "recipe R7, substrate S-1 can't be told apart: the same units carried them",
  ]);
});

Deno.test("suspects() says when no outcome could have shown anything", () => {
  const wafers = Array.from(
    { length: 4 },
    (_, i) => wafer(`W${i}`, { deposition: i < 2 ? "evap-1" : "evap-2" }),
  );
  const report = suspects(wafers.slice(0, 2), wafers.slice(2));
  // The clearest table of four wafers still comes by chance once in six.
  assertClose(report.results[0]!.pValue, 1 / 6, { rel: 1e-12 });
  assert.deepEqual(report.results.map((r) => r.verdict), ["no_power", "no_power"]);
  assert.match(report.remarks.join(), /2 of 2 hypotheses could not have been shown/);
});

Deno.test("suspects() takes the dies of one bad wafer as one piece of evidence", () => {
  // Ten wafers of twelve dies, half of them through each tool; one wafer is bad throughout.
  const all = Array.from({ length: 10 }, (_, i) => dies(`W${i}`, 12, { etch: i < 5 ? "A" : "B" }));
  const report = suspects(all[0]!, all.slice(1).flat());
  const [first] = report.results;
  assert.deepEqual(first!.dealings, [{ by: 0, carriers: 5, of: 10 }]);
  assertClose(first!.pValue, 0.5, { rel: 1e-12 });
  assert.equal(first!.verdict, "no_power"); // one bad wafer can blame no tool of five
  // Counted as independent dies it would have looked like proof.
  const naive = fisherExact({
    affectedWith: 12,
    affectedWithout: 0,
    unaffectedWith: 48,
    unaffectedWithout: 60,
  });
  assert.ok(naive.over < 2e-4);
});

Deno.test("suspects() compares a coating run inside the wafers that it was part of", () => {
  // Two wafers, half of the dies of each in run C2; all of C2 and nothing else is affected.
  const mixed = (id: string) =>
    Array.from({ length: 12 }, (_, i) => wafer(`${id}/d${i}`, { coating: i < 6 ? "C2" : "C1" }, [id, "L1"]));
  const all = [...mixed("W1"), ...mixed("W2"), ...dies("W3", 12, { coating: "C1" })];
  const bad = all.filter((d) => d.attributes["coating"] === "C2");
  const [first] = suspects(bad, all.filter((d) => !bad.includes(d))).results;
  assert.equal(first!.names[0]!.value, "C2");
  assert.equal(first!.verdict, "suspect");
  assert.deepEqual(first!.dealings, [{ by: "unit", carriers: 12, of: 24 }]);
  assertClose(first!.pValue, 1 / 924 ** 2, { rel: 1e-9 }); // C(12, 6) = 924 in either wafer
});

Deno.test("suspects() joins lots of one kind with lots of both", () => {
  const lots = ["A", "A", "A", "B", "B", "B", "B"].map((tool, i) =>
    Array.from({ length: 3 }, (_, k) => wafer(`L${i}-${k}`, { tool }, [`L${i}`]))
  );
  const both = Array.from({ length: 6 }, (_, k) => wafer(`M-${k}`, { tool: k < 3 ? "A" : "B" }, ["M"]));
  const all = [...lots.flat(), ...both];
  const bad = all.filter((w) => w.attributes["tool"] === "A");
  const [first] = suspects(bad, all.filter((w) => !bad.includes(w))).results;
  assert.deepEqual([...first!.dealings].sort((a, b) => a.of - b.of), [
    { by: "unit", carriers: 3, of: 6 },
    { by: 0, carriers: 3, of: 7 },
  ]);
  assertClose(first!.pValue, 1 / 35 / 20, { rel: 1e-9 }); // C(7, 3)·C(6, 3)
});

Deno.test("suspects() leaves units out of a test whose value isn't known", () => {
  const wafers = [
    ...[0, 1, 2, 3, 4].map((i) => wafer(`bad${i}`, { recipe: i === 0 ? null : "R1" })),
    ...[0, 1, 2, 3, 4].map((i) => wafer(`good${i}`, i === 0 ? {} : { recipe: "R2" })),
  ];
  const report = suspects(wafers.slice(0, 5), wafers.slice(5), ["recipe"]);
  const [first] = report.results;
  assert.deepEqual([first!.affectedWith, first!.affected, first!.unaffectedWith, first!.unaffected], [
    4,
    4,
    0,
    5,
  ]);
  assertClose(first!.pValue, 1 / 126, { rel: 1e-9 });
});

Deno.test("suspects() has nothing to say without affected or unaffected units, and refuses muddled groups", () => {
  const one = [wafer("W1", { etch: "A" })];
  assert.match(suspects([], one).remarks[0]!, /no affected unit/);
  assert.deepEqual(suspects(one, []).results, []);
  assert.throws(() => suspects(one, one), /"W1" is named twice/);
  assert.throws(() => suspects(one, [wafer("W2", {}, ["L"])]), RangeError);
  const in2 = [wafer("a", {}, ["W", "L1"]), wafer("b", {}, ["W", "L2"])];
  assert.throws(() => suspects([in2[0]!], [in2[1]!]), /within both "L1" and "L2"/);
});

Deno.test("suspects() blames the innocent no more often than its level, with dies that share their fate", () => {
  const random = randomFrom("innocent");
  const runs = 300;
  let blamed = 0;
  for (let run = 0; run < runs; run++) {
    const bad: TracedUnit[] = [];
    const good: TracedUnit[] = [];
    for (let lot = 0; lot < 4; lot++) {
      for (let w = 0; w < 5; w++) {
        const id = `L${lot}-${w}`;
        const attributes = {
          etch: `e${random.below(3)}`,
          substrate: `s${lot}`,
          order: `o${random.below(2)}`,
        };
        const risk = 0.6 * random.uniform() ** 3 * (1 + random.below(2)) / 2;
        for (const d of dies(id, 10, attributes, `L${lot}`)) {
          const coated = { ...d, attributes: { ...attributes, coating: `c${random.below(4)}` } };
          (random.uniform() < risk ? bad : good).push(coated);
        }
      }
    }
    if (suspects(bad, good).results.some((r) => r.verdict === "suspect")) blamed++;
  }
  // Promised: at most 5 %; standard error 1.3 %.
  assert.ok(blamed / runs < 0.075, `blamed in ${blamed} of ${runs} runs`);
  assert.ok(blamed > 0);
});

Deno.test("suspects() gives the same report in whatever order units come", () => {
  const random = randomFrom("order");
  const all = Array.from(
    { length: 40 },
    (_, i) => wafer(`W${i}`, { a: `${random.below(3)}`, b: `${random.below(2)}` }),
  );
  const first = suspects(all.slice(0, 12), all.slice(12));
  const second = suspects(all.slice(0, 12).reverse(), all.slice(12).reverse());
  const byName = (r: typeof first) =>
    r.results.map((s) => [s.names[0], s.verdict, s.pValue.toPrecision(9)]).sort((x, y) =>
      JSON.stringify(x) < JSON.stringify(y) ? -1 : 1
    );
  assert.deepEqual(byName(first), byName(second));
});

Deno.test("suspects() finds a tool that spoils most dies in four lots of six wafers, and says that three of four are too few", () => {
  const random = randomFrom("guilty");
  const runs = 60;
  const found = ([[4, 6], [3, 4]] as const).map(([lots, wafers]) => {
    let [shown, powerless] = [0, 0];
    for (let run = 0; run < runs; run++) {
      const bad: TracedUnit[] = [];
      const good: TracedUnit[] = [];
      for (let k = 0; k < lots * wafers; k++) {
        const lot = k % lots;
        const attributes = {
          etch: `e${random.below(3)}`,
          substrate: `s${lot}`,
          order: `o${random.below(2)}`,
        };
        const risk = attributes.etch === "e0" ? 0.6 : 0.08;
        for (const d of dies(`W${k}`, 12, attributes, `L${lot}`)) {
          (random.uniform() < risk ? bad : good).push(d);
        }
      }
      const etch = suspects(bad, good).results.find((r) => r.names.some((n) => n.value === "e0"));
      if (etch?.verdict === "suspect") shown++;
      if (etch?.verdict === "no_power") powerless++;
    }
    return { shown: shown / runs, powerless: powerless / runs };
  });
  assert.ok(found[0]!.shown > 0.85, JSON.stringify(found));
  assert.ok(found[1]!.powerless > 0.85, JSON.stringify(found));
});
