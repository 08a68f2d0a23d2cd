// Pure: no I/O, no clock, no hidden randomness.
import { GEOMETRY_PARAMETERS } from "../guides/mod.ts";
import type { CheckedRequest } from "../../shared/schemas/request.ts";
import type { Platform } from "../../shared/schemas/platform.ts";
import type { GuideGeometry, Polarisation } from "../../shared/vocabulary.ts";
import { isModeRead } from "./fibre_coupling.ts";
import type { Role } from "./figure_basis.ts";
import type { ArmTraits, GuideInputs, UsedTrait } from "./guide_inputs.ts";
import { targetOf, type TargetTrait } from "./targets.ts";

/** Traits that are put right together, by what makes them on the wafer, and the roles that they play. */
export const RESTORE_GROUPS = {
  loss: ["pump_loss", "signal_loss", "idler_loss"],
  mode_size: ["signal_mode", "idler_mode"],
  facet: ["signal_facet", "idler_facet"],
  poling: ["poling"],
  phase_matching: ["phase_matching"],
} as const satisfies Readonly<Record<string, readonly Role[]>>;
export type RestoreGroup = keyof typeof RESTORE_GROUPS;
export const RESTORE_GROUP_NAMES = Object.keys(RESTORE_GROUPS) as RestoreGroup[];

/** Duty of a grating as designed, where the platform states no target. */
const DESIGN_DUTY = 0.5;

/** Where targets come from. */
export interface RestoreAims {
  readonly platform: Pick<Platform, "targets" | "defaults">;
  /** Width of the guide as drawn on the mask. */
  readonly designWidth_um: number;
}

/**
 * A guide with some groups of traits at their targets, exactly known; every other trait keeps its key and with it its draws.
 * Poling becomes the design's grating, phase matching that of the cross-section as designed: calculated, with the offset that the
 * lot's guides have on the whole.
 */
export function restoredInputs(
  guide: GuideInputs,
  groups: readonly RestoreGroup[],
  { waves }: CheckedRequest,
  { platform, designWidth_um }: RestoreAims,
): GuideInputs {
  const has = (group: RestoreGroup) => groups.includes(group);
  const aimed = (trait: TargetTrait, lambda: number, pol: Polarisation): UsedTrait | null => {
    const value = targetOf(platform, trait, { lambda, pol });
    return value === null ? null : exactly(value, `${trait}|${lambda}|${pol}`);
  };
  const loss = (made: UsedTrait, lambda: number, pol: Polarisation) =>
    has("loss") ? aimed("loss_db_cm", lambda, pol) ?? made : made;
  const arm = (made: ArmTraits, lambda: number, pol: Polarisation): ArmTraits => {
    const [x, y] = (["mfd_x_um", "mfd_y_um"] as const).map((t) => aimed(t, lambda, pol));
    const reflectivity = aimed("coated_reflectivity", lambda, pol);
    return {
      loss: loss(made.loss, lambda, pol),
      // Of the two estimates of a coupling the one that is used as made: their difference is no gain.
      mode: has("mode_size") && x && y ? { x, y, read: isModeRead(made.mode) } : made.mode,
      facet: has("facet") && reflectivity ? { state: "coated", reflectivity } : made.facet,
    };
  };
  const restored: GuideInputs = {
    ...guide,
    pumpLoss: loss(guide.pumpLoss, waves.lambdaP, waves.polP),
    signal: arm(guide.signal, waves.lambdaS, waves.polS),
    idler: arm(guide.idler, waves.lambdaI, waves.polI),
    ...(has("poling") ? { poling: designGrating(platform), mismatchSpread: null } : {}),
  };
  return has("phase_matching") ? asDesigned(restored, designWidth_um, platform) : restored;
}

const exactly = (value: number, key: string): UsedTrait => ({
  value,
  u: 0,
  basis: "platform",
  key: `target|${key}`,
});

/** The mask's grating: statistics without spread make it wall by wall. */
function designGrating({ targets }: Pick<Platform, "targets">): GuideInputs["poling"] {
  const { duty = DESIGN_DUTY, duty_sd = 0, merged = 0 } = targets;
  return {
    from: "duty",
    duty: exactly(duty, "duty"),
    dutySd: exactly(duty_sd, "duty_sd"),
    merged: exactly(merged, "merged"),
  };
}

/** The cross-section as drawn, the same all along the guide, and the mismatch that such guides of the lot have. */
function asDesigned(
  guide: GuideInputs,
  designWidth_um: number,
  platform: Pick<Platform, "targets" | "defaults">,
): GuideInputs {
  const { along: _, otherScans: __, ...rest } = guide;
  const geometry: { -readonly [K in keyof GuideGeometry]: GuideGeometry[K] } = {
    ...guide.geometry,
    width_um: designWidth_um + (platform.targets.width_error_um ?? 0),
  };
  for (const parameter of GEOMETRY_PARAMETERS) {
    if (parameter === "width_um" || geometry[parameter] === undefined) continue;
    geometry[parameter] = targetOf(platform, parameter) ?? geometry[parameter];
  }
  // What all guides of the lot have in common is the error of the calculation, which no fabrication puts right.
  const offset = platform.targets.mismatch_offset_per_m ?? guide.usualOffset ?? 0;
  return { ...rest, geometry, geometryErrors: [], offset: exactly(offset, "mismatch_offset_per_m") };
}
