// A guide of bulk KTP and a request for it, for tests of single numbers.
import { bulkIndexModel, constantAreaModel } from "../../../models/guides/mod.ts";
import { type GuideInputs, type PlatformModel, platformModel } from "../../../models/decision/mod.ts";
import { type CheckedRequest, checkRequest, requestSchema } from "../../../shared/schemas/request.ts";
import { platformSchema } from "../../../shared/schemas/platform.ts";

const platform = platformSchema.parse(JSON.parse(Deno.readTextFileSync("models/platforms/bulk-ktp.json")));

export const ktp: PlatformModel = platformModel(
  platform,
  bulkIndexModel(platform.material, platform.axes),
  constantAreaModel(platform.effective_area_um2!),
);

export const trait = (value: number, u: number, key: string) => ({
  value,
  u,
  basis: "die" as const,
  key,
});

const arm = (name: string) => ({
  loss: trait(0.5, 0.05, `loss ${name}`),
  mode: { x: trait(8, 0.2, `x ${name}`), y: trait(6, 0.2, `y ${name}`) },
  facet: { state: "bare" as const, basis: "die" as const },
});

/** 20 mm long, 18 mm poled with 46.1 µm: matches 791 nm → 1582 nm at 36.5 °C. */
export const guide: GuideInputs = {
  id: "A/01/g1",
  geometry: { width_um: 3 },
  geometryErrors: [],
  length: 0.02,
  period: 46.1e-6,
  poledFrom: 0.001,
  poledLength: 0.018,
  pumpLoss: trait(0.5, 0, "pump loss"),
  signal: arm("signal"),
  idler: arm("idler"),
  poling: {
    from: "duty",
    duty: trait(0.5, 0, "duty"),
    dutySd: trait(0, 0, "duty_sd"),
    merged: trait(0, 0, "merged"),
  },
  offset: null,
};

/** A request as its file would give it. @throws Error naming what is wrong with it */
export function request(fields: Record<string, unknown>): CheckedRequest {
  const checked = checkRequest(requestSchema.parse({ request: "r", oven_c: [20, 90], ...fields }));
  if ("problems" in checked) throw new Error(JSON.stringify(checked.problems));
  return checked;
}

export const TYPE_II = { pump: "TE", signal: "TE", idler: "TM" };
