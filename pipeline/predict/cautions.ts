import { type SolvedDesigns, solvedOutputAt } from "../../models/guides/mod.ts";
import type { GuidePrediction } from "../../models/decision/mod.ts";
import type { Platform } from "../../shared/schemas/platform.ts";
import type { CheckedRequest, Request } from "../../shared/schemas/request.ts";

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

/**
 * Where the design's field was solved: what a request's fibres take of it, beside the Gaussian estimate that the figures
 * rest on. The two differ by the field's tail into the crystal, which a Gaussian of the same size does not have.
 */
export function couplingRemarks(
  designs: SolvedDesigns | null,
  width_um: number,
  { request, waves }: Pick<CheckedRequest, "request" | "waves">,
  figures: GuidePrediction["figures"],
): string[] {
  if (designs === null) return [];
  const arms = [
    ["signal", request.signal.fibre_mfd_um, waves.polS, waves.lambdaS],
    ["idler", request.idler?.fibre_mfd_um, waves.polI, waves.lambdaI],
  ] as const;
  return arms.flatMap(([arm, fibre_um, pol, lambda]) => {
    const used = figures.find((f) => f.figure === `coupling_${arm}`)?.mean ?? null;
    if (fibre_um === undefined || used === null) return [];
    const solved = solvedOutputAt(designs.outputs, { width_um }, pol, lambda);
    if (solved === null || solved.result.cutOff) return [];
    const own = solved.result.fibres.find(({ mfd }) => Math.abs(mfd / (fibre_um * 1e-6) - 1) < 1e-9);
    return own === undefined ? [] : [
      `solved_coupling: the ${arm}'s fibre takes ${
        own.value.toFixed(3)
      } of the design's solved field; used is the ` +
      `Gaussian estimate of its mode size, ${used.toFixed(3)}`,
    ];
  });
}
