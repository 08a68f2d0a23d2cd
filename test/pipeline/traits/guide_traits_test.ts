import { deepEqual, equal, ok } from "node:assert/strict";
import { resolveGuide, windowsByUnit } from "../../../pipeline/traits/guide_traits.ts";
import { TraitPools } from "../../../pipeline/traits/pools.ts";
import type { TraitRow } from "../../../pipeline/traits/trait_row.ts";
import type { PolingRecord } from "../../../pipeline/records.ts";
import { assertClose } from "../../assert_close.ts";
import { request, TYPE_II } from "../../models/decision/a_guide.ts";
import { HERE, lotDesign, PLATFORM, SAME_DIE, SAME_LOT, SAME_WAFER, traitRow, window } from "./a_lot.ts";

const PAIRS = request({
  process: "pair-generation",
  polarisations: TYPE_II,
  pump: { wavelength_nm: 791, average_power_mw: 1 },
  signal: { wavelength_nm: 1582 },
});
const duty = (unit: string, value: number) => [
  traitRow("duty", unit, value),
  traitRow("duty_sd", unit, 0.02),
  traitRow("merged", unit, 0.01),
];
const resolve = (
  rows: readonly TraitRow[],
  windows: readonly PolingRecord[] = [],
  guide = HERE,
  walls: Float64Array | null = null,
) => resolveGuide(new TraitPools(PLATFORM, lotDesign(), rows), windowsByUnit(windows), guide, PAIRS, walls);

Deno.test("a grating is known by walls, else by windows, else by the pooled duty, else by the platform's", () => {
  const walls = Float64Array.of(511, 534, 557);
  const own = [window(HERE.guide_id, 0.44), window(HERE.guide_id, 0.46, { window_start_mm: 6 })];
  const rows = [...duty("A-1/01/g1", 0.45), traitRow("walls_complete", HERE.guide_id, 1, { u: 0 })];

  const exact = resolve(rows, own, HERE, walls);
  ok(exact.inputs.poling.from === "walls");
  deepEqual([...exact.inputs.poling.walls].map((z) => Number((z * 1e6).toFixed(6))), [511, 534, 557]);
  equal(exact.inputs.poling.basis, "measured");
  const role = exact.roles.find((r) => r.role === "poling")!;
  deepEqual([role.trait, role.from, role.used], ["walls", HERE.guide_id, [3]]);

  const seen = resolve(rows, own);
  ok(seen.inputs.poling.from === "windows");
  deepEqual(seen.inputs.poling.windows.map((w) => [w.from, w.length, w.dutyMean]), [
    [0.003, 0.001, 0.44],
    [0.006, 0.001, 0.46],
  ]);
  equal(seen.inputs.poling.basis, "measured");

  const pooled = resolve(rows, [], SAME_DIE).inputs.poling;
  ok(pooled.from === "duty");
  assertClose(pooled.duty.value, 0.45, { abs: 0.005 });
  deepEqual([pooled.duty.basis, pooled.dutySd.basis, pooled.merged.basis], ["die", "die", "die"]);

  const design = resolve([]).inputs.poling;
  ok(design.from === "duty");
  deepEqual([design.duty.value, design.duty.u, design.duty.basis], [0.5, 0.03, "platform"]);
});

Deno.test("windows of a whole die or wafer serve its guides, its own windows first", () => {
  const windows = [window("A-1/01/g2", 0.41), window("A-1/01", 0.43), window("A-1", 0.47)];
  const from = (guide: typeof HERE) => {
    const { poling } = resolve([], windows, guide).inputs;
    return poling.from === "windows" ? [poling.basis, poling.windows[0]!.dutyMean] : [poling.from];
  };
  deepEqual(from(SAME_DIE), ["measured", 0.41]);
  deepEqual(from(HERE), ["die", 0.43]);
  deepEqual(from(SAME_WAFER), ["wafer", 0.47]);
  deepEqual(from(SAME_LOT), ["duty"]);
  // What is told of a die is not told of the guide: how far guides differ comes on top.
  const dutyOf = (guide: typeof HERE) => {
    const { inputs, roles } = resolve(duty("A-1/01", 0.43), windows, guide);
    ok(inputs.poling.from === "windows");
    return { duty: inputs.poling.duty, told: roles.filter((r) => r.trait === "duty").length };
  };
  deepEqual(dutyOf(SAME_DIE), { duty: undefined, told: 0 });
  ok(dutyOf(HERE).duty!.u > 0.005 && dutyOf(HERE).told === 1);
});

Deno.test("each role takes its own wavelength and polarisation", () => {
  const loss = (nm: number, pol: "TE" | "TM", value: number) =>
    traitRow("loss_db_cm", HERE.guide_id, value, { wavelength_nm: nm, polarisation: pol });
  const { inputs, roles } = resolve([loss(791, "TE", 0.7), loss(1582, "TE", 0.4), loss(1582, "TM", 0.6)]);
  assertClose(inputs.pumpLoss.value, 0.7, { abs: 1e-4 });
  assertClose(inputs.signal.loss.value, 0.4, { abs: 1e-4 });
  assertClose(inputs.idler.loss.value, 0.6, { abs: 1e-4 });
  deepEqual(
    roles.filter((r) => r.trait === "loss_db_cm").map((r) => [r.role, r.wavelength_nm, r.polarisation]),
    [["pump_loss", 791, "TE"], ["signal_loss", 1582, "TE"], ["idler_loss", 1582, "TM"]],
  );
  deepEqual([inputs.length, inputs.poledFrom, inputs.poledLength], [0.008, 0.0005, 0.007]);
  assertClose(inputs.period, 46.05e-6, { rel: 1e-12 });
  // Signal and idler of one wavelength and polarisation rest on one reading: they must err together.
  const one = request({
    process: "second-harmonic",
    polarisations: { pump: "TE", signal: "TE", idler: "TE" },
    signal: { wavelength_nm: 1582 },
  });
  const both =
    resolveGuide(new TraitPools(PLATFORM, lotDesign(), [loss(1582, "TE", 0.4)]), new Map(), HERE, one, null)
      .inputs;
  equal(both.signal.loss.key, both.idler.loss.key);
  ok(inputs.signal.loss.key !== inputs.idler.loss.key);
});

Deno.test("a mode size that is neither read nor a default is unknown, with the reason", () => {
  const { mfd_y_um: _, ...defaults } = PLATFORM.defaults;
  const pools = new TraitPools({ ...PLATFORM, defaults }, lotDesign(), []);
  const { mode } = resolveGuide(pools, new Map(), HERE, PAIRS, null).inputs.signal;
  ok("reason" in mode && /no mode size is known at 1582 nm TE/.test(mode.reason));
});

Deno.test("a mode size that only another lot read is the platform's by its basis, and read all the same", () => {
  const row = (trait: "mfd_x_um" | "mfd_y_um", polarisation: "TE" | "TM") =>
    traitRow(trait, "B-1/01/g1", 7, { wavelength_nm: 1582, polarisation, u: 0.1 });
  const rows = (["TE", "TM"] as const).flatMap((pol) => [row("mfd_x_um", pol), row("mfd_y_um", pol)]);
  const modeOf = (others: ConstructorParameters<typeof TraitPools>[3]) => {
    const pools = new TraitPools(PLATFORM, lotDesign(), [], others);
    const { mode } = resolveGuide(pools, new Map(), HERE, PAIRS, null).inputs.signal;
    ok(!("reason" in mode));
    return [mode.x.basis, mode.read];
  };
  deepEqual(modeOf([{ lot: "B", rows, places: new Map() }]), ["platform", true]);
  deepEqual(modeOf([]), ["platform", false]);
});
