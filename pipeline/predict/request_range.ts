import { materialRange } from "../../models/materials/mod.ts";
import { InputError } from "../../shared/errors.ts";
import type { Ledger } from "../ledger/mod.ts";
import { type LoadedPlatform, loadPlatform } from "../platforms.ts";
import { recordsOf } from "../records.ts";
import type { LoadedRequest } from "../requests.ts";

/**
 * A wavelength at which the material has no index is the request's mistake, and said before anything is computed.
 * @throws InputError that names the field and the range
 */
export function checkRange(request: LoadedRequest, { platform }: Pick<LoadedPlatform, "platform">): void {
  const { waves } = request;
  for (
    const [field, lambda, pol] of [
      ["pump.wavelength_nm", waves.lambdaP, waves.polP],
      ["signal.wavelength_nm", waves.lambdaS, waves.polS],
      ["idler.wavelength_nm", waves.lambdaI, waves.polI],
    ] as const
  ) {
    const [low, high] = materialRange(platform.material, platform.axes[pol]).lambda;
    if (lambda >= low && lambda <= high) continue;
    const text = (l: number) => (l * 1e9).toFixed(1);
    throw new InputError(
      `Cannot use request ${request.file} on platform ${platform.platform}: ${field} is ${
        text(lambda)
      } nm, ` +
        `outside the index of ${platform.material} for ${pol} (${text(low)}–${text(high)} nm)`,
      { file: request.file, column: field, value: text(lambda) },
    );
  }
}

/** {@link checkRange} of all requests on the platforms of all lots: for before the first lot is touched. */
export async function checkRanges(
  ledger: Ledger,
  lots: readonly string[],
  requests: readonly LoadedRequest[],
  platforms?: string,
): Promise<void> {
  const ids = new Set<string>();
  for (const lot of lots) for (const { platform } of await recordsOf(ledger, "lots", lot)) ids.add(platform);
  for (const id of ids) {
    const loaded = await loadPlatform(id, platforms);
    for (const request of requests) checkRange(request, loaded);
  }
}
