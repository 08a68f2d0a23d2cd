// Pure: no I/O, no clock, no hidden randomness.
import { centredOverlap } from "../metrology/mod.ts";
import { absent, given, type Outcome } from "../pairs/mod.ts";
import type { ArmRequest, CheckedRequest } from "../../shared/schemas/request.ts";
import { um } from "../../shared/units.ts";
import type { DrawnArm } from "./drawn_traits.ts";
import type { ArmTraits } from "./guide_inputs.ts";
import type { Site } from "./site.ts";

type ArmName = "signal" | "idler";

/** What a request's fibre takes of an arm's mode, both ways, where they exist. */
interface Couplings {
  /** Of the design's solved field. */
  readonly solved: number | null;
  /** Of a Gaussian of the mode's size. */
  readonly gaussian: number | null;
  /** A measured mode size belongs to the guides as made; the platform's says no more than the solved field does. */
  readonly used: "solved" | "gaussian" | null;
}

/** Whether a mode's size rests on a reading, of this lot or another one. */
export const isModeRead = (mode: ArmTraits["mode"]): boolean =>
  !("reason" in mode) &&
  (mode.read === true || mode.x.basis !== "platform" || mode.y.basis !== "platform");

function couplings(
  { model, guide, waves }: Site,
  arm: ArmName,
  { mode }: ArmTraits,
  fibre_um: number | undefined,
): Couplings {
  if (fibre_um === undefined) return { solved: null, gaussian: null, used: null };
  const [pol, lambda] = arm === "signal" ? [waves.polS, waves.lambdaS] : [waves.polI, waves.lambdaI];
  const solved = model.solvedCoupling(guide.geometry, pol, lambda, um(fibre_um));
  const gaussian = "reason" in mode ? null : overlap(mode.x.value, mode.y.value, fibre_um);
  const measured = isModeRead(mode);
  const used = solved !== null && !measured ? "solved" : gaussian === null ? null : "gaussian";
  return { solved, gaussian, used };
}

const overlap = (x_um: number, y_um: number, fibre_um: number): number =>
  centredOverlap([um(x_um), um(y_um)], [um(fibre_um), um(fibre_um)]);

/**
 * Coupling of an arm into the request's fibre, draw by draw. Where a mode size was read, at this wavelength and polarisation in
 * whatever lot, the Gaussian of the drawn size; else that of the design's solved field, if it was solved for this fibre, and the
 * Gaussian of the platform's size only without one. The solved field knows nothing of how far guides are off their design: what
 * the platform says of its mode size is carried over by the Gaussian, solved·G(drawn size)/G(stated size), and stays below 1.
 */
export function armCoupling(
  site: Site,
  arm: ArmName,
  traits: ArmTraits,
  { modeX, modeY }: DrawnArm,
  request: ArmRequest | undefined,
): (k: number) => Outcome {
  const fibre = request?.fibre_mfd_um;
  if (fibre === undefined) {
    const unknown = absent(`the request gives no fibre_mfd_um for the ${arm}`);
    return () => unknown;
  }
  const { solved, gaussian, used } = couplings(site, arm, traits, fibre);
  const drawn = (k: number) => overlap(modeX![k]!, modeY![k]!, fibre);
  if (used === "gaussian") return (k) => given(drawn(k));
  if (used === "solved") {
    return (k) => given(gaussian === null ? solved! : Math.min(1, solved! * drawn(k) / gaussian));
  }
  const unknown = absent("reason" in traits.mode ? traits.mode.reason : "no mode size is known");
  return () => unknown;
}

/** Says of each arm whose field was solved which number is used, and what the other one is. */
export function couplingRemarks(site: Site, { request }: CheckedRequest): string[] {
  const { guide } = site;
  const arms = [["signal", guide.signal, request.signal], ["idler", guide.idler, request.idler]] as const;
  return arms.flatMap(([arm, traits, asked]) => {
    const { solved, gaussian, used } = couplings(site, arm, traits, asked?.fibre_mfd_um);
    if (solved === null) return [];
    const of = `the ${arm}'s fibre takes ${solved.toFixed(3)} of the design's solved field`;
    if (gaussian === null) return [`solved_coupling: ${of}, which is used; no mode size is known`];
    return used === "solved"
      ? [
        `solved_coupling: ${of}, which is used; the Gaussian estimate of the platform's mode size would be ${
          gaussian.toFixed(3)
        }`,
      ]
      : [
        `solved_coupling: ${of}; used is the Gaussian estimate of its measured mode size, ${
          gaussian.toFixed(3)
        }`,
      ];
  });
}
