import { TraitPools } from "../../../pipeline/traits/pools.ts";
import type { GuideRecord, LotDesign } from "../../../pipeline/records.ts";
import type { TraitRow } from "../../../pipeline/traits/trait_row.ts";
import type { Platform } from "../../../shared/schemas/platform.ts";
import { assertClose } from "../../assert_close.ts";

const share = (guide: string, value: number, u: number) => ({
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
