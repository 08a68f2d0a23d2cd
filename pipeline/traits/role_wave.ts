import type { Role } from "../../models/decision/mod.ts";
import type { CheckedRequest } from "../../shared/schemas/request.ts";
import type { Polarisation } from "../../shared/vocabulary.ts";
import { wavelengthNm } from "./guide_traits.ts";

/** Wavelength and polarisation at which a trait is read; null for traits of the whole guide. */
export function waveOf(
  { waves }: Pick<CheckedRequest, "waves">,
  { roles }: { readonly roles: readonly Role[] },
): { wavelength_nm: number; polarisation: Polarisation } | null {
  const has = (...names: Role[]) => names.some((n) => roles.includes(n));
  if (has("signal_loss", "signal_mode", "signal_facet")) return at(waves.lambdaS, waves.polS);
  if (has("idler_loss", "idler_mode", "idler_facet")) return at(waves.lambdaI, waves.polI);
  return has("pump_loss") ? at(waves.lambdaP, waves.polP) : null;
}

const at = (lambda: number, polarisation: Polarisation) => ({
  wavelength_nm: wavelengthNm(lambda),
  polarisation,
});
