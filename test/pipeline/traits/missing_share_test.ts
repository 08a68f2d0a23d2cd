import { TraitPools } from "../../../pipeline/traits/pools.ts";
import type { GuideRecord, LotDesign } from "../../../pipeline/records.ts";
import type { TraitRow } from "../../../pipeline/traits/trait_row.ts";
import type { Platform } from "../../../shared/schemas/platform.ts";
import { ok } from "node:assert/strict";
import { truncated } from "../../../models/pooling/mod.ts";
import { assertClose } from "../../assert_close.ts";

const share = (guide: string, value: number, u: number, counted = 390) => ({
  trait: "merged",
  scope: "guide",
  unit: guide,
  wafer: "A",
  die_id: guide.slice(0, 4),
  guide_id: guide,
  width_um: 3,
  wavelength_nm: null,
  polarisation: null,
  process: null,
  value,
  u,
  counted,
});

Deno.test("the share of missing domains of a guide without windows is the mean of the guides that were inspected", () => {
  // u as counts of about 390 domains give it: 0.002 for none missing, 0.016 for a tenth.
  const rows = [
    share("A/01/g1", 0, 0.0018),
    share("A/01/g2", 0.11, 0.016),
    share("A/01/g3", 0.0026, 0.0031),
  ] as unknown as TraitRow[];
  const platform = { platform: "p", defaults: {}, priors: {} } as unknown as Platform;
  const pools = new TraitPools(platform, { lot: { lot: "L" } } as unknown as LotDesign, rows);
  const guide = { wafer: "A", die_id: "A/01", guide_id: "A/01/g9", width_um: 3 } as GuideRecord;
  const found = pools.estimate("merged", guide, null, null)!;
  assertClose(found.value, (0 + 0.11 + 0.0026) / 3, { rel: 1e-9 });
});

Deno.test("where no domain of many was missing, none to speak of is expected to be missing elsewhere", () => {
  const platform = { platform: "p", defaults: {}, priors: {} } as unknown as Platform;
  const drawn = (guides: number, domains: number) => {
    const [a, b] = [0.5, domains + 0.5];
    const u = Math.sqrt(a * b / ((a + b) ** 2 * (a + b + 1)));
    const rows = Array.from(
      { length: guides },
      (_, k) => share(`A-${k % 2}/${String(k % 6).padStart(2, "0")}/g${k}`, 0, u, domains),
    ).map((r) => ({ ...r, wafer: r.unit.slice(0, 3), die_id: r.unit.slice(0, 6) })) as unknown as TraitRow[];
    const pools = new TraitPools(platform, { lot: { lot: "L" } } as unknown as LotDesign, rows);
    const guide = { wafer: "A-0", die_id: "A-0/99", guide_id: "A-0/99/g1", width_um: 3 } as GuideRecord;
    const { value, u: pooled } = pools.estimate("merged", guide, null, null)!;
    return truncated({ value, u: pooled }, { low: 0, high: 1 }).value;
  };
  // Jeffreys' share of all that was counted is half an event; a normal cut at 0 and what guides may differ by add to it.
  for (const [guides, domains] of [[30, 20], [30, 100], [12, 300]] as const) {
    const jeffreys = 0.5 / (guides * domains + 1);
    const found = drawn(guides, domains);
    ok(
      found > jeffreys && found < 4 * jeffreys,
      `${guides} × ${domains}: ${found}, half an event is ${jeffreys}`,
    );
  }
});
