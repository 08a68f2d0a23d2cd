// Pure: no I/O, no clock, no hidden randomness.
import type { Figure } from "../../shared/schemas/figures.ts";
import type { Decision } from "./conformity.ts";
import type { TraitColumn } from "./drawn_traits.ts";
import { RESTS_ON, type Role } from "./figure_basis.ts";
import type { GuideInputs } from "./guide_inputs.ts";

/**
 * Whether nothing that a decision hangs on was read in the guide's lot: every uncertain trait under the required figures, and
 * under the operating point, is the platform's.
 */
export function restsOnPlatformAlone(
  { poling }: Pick<GuideInputs, "poling">,
  required: readonly Figure[],
  columns: readonly TraitColumn[],
): boolean {
  if (poling.from !== "duty") return false;
  const roles = new Set<Role>(["phase_matching", ...required.flatMap((figure) => RESTS_ON[figure])]);
  const open = columns.filter((c) => c.u > 0 && c.roles.some((role) => roles.has(role)));
  return open.length > 0 && open.every((c) => c.basis === "platform");
}

/**
 * A decision that would rest on the platform's defaults alone is put off until something is read. What no draw can meet stays
 * rejected: that is the design's doing.
 * @returns the decision, and the remark that goes with a changed one
 */
export function withheld(
  decision: Decision,
  probability: number,
  unread: boolean,
): { readonly decision: Decision; readonly remarks: readonly string[] } {
  if (!unread || decision === "hold" || probability === 0) return { decision, remarks: [] };
  const verb = decision === "accept" ? "accepted" : "rejected";
  return {
    decision: "hold",
    remarks: [
      `unread: it would be ${verb} on the platform's defaults alone; held until something of its lot is read`,
    ],
  };
}
