import { deepEqual, equal, ok } from "node:assert/strict";
import type { GeometryRecord } from "../../../pipeline/records.ts";
import { alongGuides } from "../../../pipeline/traits/along_guide.ts";
import { platformSchema } from "../../../shared/schemas/platform.ts";
import { assertClose } from "../../assert_close.ts";

const platform = platformSchema.parse(
  JSON.parse(await Deno.readTextFile("models/platforms/ti-ln-zcut.json")),
);
const at = (z_mm: number | null, value: number, u_value: number | null, line: number): GeometryRecord =>
  ({
    unit: "W/01/g1",
    scope: "guide",
    wafer: "W",
    die_id: "W/01",
    guide_id: "W/01/g1",
    z_mm,
    quantity: "width_um",
    value,
    u_value,
    file_name: "readings/geometry.csv",
    source_file: "0",
    source_line: line,
  }) as unknown as GeometryRecord;

Deno.test("a width that varies along a guide is kept as deviations from its mean, places in order", () => {
  const rows = [at(9, 7.2, 0.02, 4), at(1, 6.9, 0.02, 2), at(5, 7, 0.02, 3), at(5, 7.1, 0.02, 5)];
  const [found, ...more] = alongGuides(rows, platform).get("W/01/g1")!;
  equal(more.length, 0);
  equal(found!.places, 3);
  [0.001, 0.005, 0.009].forEach((z, k) => assertClose(found!.along!.z[k]!, z, { rel: 1e-12 }));
  const mean = (6.9 + 7 + 7.1 + 7.2) / 4;
  [6.9, 7.05, 7.2].forEach((v, k) => assertClose(found!.along!.deviation[k]!, v - mean, { abs: 1e-12 }));
  deepEqual(found!.refs[0]!.lines, [[2, 5]]);
});

Deno.test("readings that scatter as their own u explains say nothing of the guide, and one place has no variation", () => {
  const noise = [at(1, 7.01, 0.05, 2), at(5, 6.96, 0.05, 3), at(9, 7.04, 0.05, 4)];
  const [found] = alongGuides(noise, platform).get("W/01/g1")!;
  equal(found!.along, null);
  ok(found!.sd < 0.05);
  equal(alongGuides([at(5, 7, 0.02, 2), at(5, 7.3, 0.02, 3), at(null, 7, 0.02, 4)], platform).size, 0);
});
