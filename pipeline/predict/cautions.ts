import type { GuidePrediction } from "../../models/decision/mod.ts";
import type { Platform } from "../../shared/schemas/platform.ts";
import type { Request } from "../../shared/schemas/request.ts";

/**
 * Remarks on power above what the platform's notes allow: stated by the request, or suggested by a figure. The limit is an
 * estimate of the platform file, for continuous power in the guide.
 */
export function powerCautions(
  { notes }: Pick<Platform, "notes">,
  { pump, signal, idler }: Pick<Request, "pump" | "signal" | "idler">,
  figures: GuidePrediction["figures"],
): string[] {
  const limit = notes.pump_limit_mw;
  if (limit === undefined) return [];
  const stated = [["pump", pump], ["signal", signal], ["idler", idler]] as const;
  const suggested = figures.find((f) => f.figure === "pump_power_at_g2_mw")?.mean ?? 0;
  const above = [
    ...stated.map(([wave, arm]) => [`the request's ${wave}`, arm?.average_power_mw ?? 0] as const),
    ["pump_power_at_g2_mw", suggested] as const,
  ].filter(([, power]) => power > limit);
  const why = notes.caution === undefined ? "" : ` (${notes.caution})`;
  return above.map(([what, power]) =>
    `above_power_limit: ${what}, ${
      Number(power.toPrecision(3))
    } mW, is above the platform's ${limit} mW${why}`
  );
}

/** Says of a decision that more draws might change it, where no more were taken. */
export function samplingRemarks({ settled, probability, draws }: GuidePrediction): string[] {
  return settled ? [] : [
    `at_threshold: probability ${
      Number(probability.toFixed(4))
    } of ${draws} draws is too near a threshold to decide for ` +
    "sure: more draws might decide otherwise",
  ];
}

/** Says of a guide that a reading of its own, or of its die as a whole, is one that the others contradict. */
export function contradictionRemarks(
  { guide_id, die_id }: { readonly guide_id: string; readonly die_id: string },
  contradictions: readonly { readonly unit: string; readonly text: string }[],
): string[] {
  return contradictions.filter(({ unit }) => unit === guide_id || unit === die_id)
    .map(({ text }) => `contradicted_reading: ${text}`);
}
