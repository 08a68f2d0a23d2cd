import { type GuideInputs, type PlatformModel, predictGuide } from "../../models/decision/mod.ts";
import { mm, um } from "../../shared/units.ts";
import type { GuideGeometry } from "../../shared/vocabulary.ts";
import type { LoadedRequest } from "../requests.ts";

/** Purity of an ideal, lossless grating in a guide of some platform and geometry; null where the request has none. */
export function idealPurity(request: LoadedRequest | null, poledLength_mm: number) {
  return (model: PlatformModel, geometry: GuideGeometry, period_um: number): number | null => {
    if (request === null || request.request.process !== "pair-generation" || !request.pulsed) return null;
    const exact = (value: number, key: string) => ({ value, u: 0, basis: "platform" as const, key });
    const arm = {
      loss: exact(0, "loss"),
      mode: { reason: "not asked" },
      facet: { state: "bare" as const, basis: "platform" as const },
    };
    const inputs: GuideInputs = {
      id: "design",
      geometry,
      geometryErrors: [],
      length: mm(poledLength_mm),
      period: um(period_um),
      poledFrom: 0,
      poledLength: mm(poledLength_mm),
      pumpLoss: exact(0, "loss"),
      signal: arm,
      idler: arm,
      poling: {
        from: "duty",
        duty: exact(0.5, "duty"),
        dutySd: exact(0, "duty_sd"),
        merged: exact(0, "merged"),
      },
      offset: null,
    };
    const { figures } = predictGuide(model, request, inputs, { recorded: request.spectrum });
    return figures.find((f) => f.figure === "purity")?.mean ?? null;
  };
}
