import type { PlatformModel } from "../../models/decision/mod.ts";
import { type SolvedDesigns, solvedOutputAt } from "../../models/guides/mod.ts";
import { centredOverlap } from "../../models/metrology/mod.ts";
import { toNm } from "../../shared/units.ts";
import type { GuideGeometry, Polarisation, ThreeWaves } from "../../shared/vocabulary.ts";
import type { LoadedRequest } from "../requests.ts";

/** One wave of a process in a design. */
export interface ModeFacts {
  readonly wave: "pump" | "signal" | "idler";
  readonly wavelength_nm: number;
  readonly polarisation: Polarisation;
  readonly n_eff: number;
  readonly group_index: number;
  /** Solved designs only; null where nothing was solved at this wavelength. */
  readonly modes: number | null;
  readonly mfd_x_um: number | null;
  readonly mfd_y_um: number | null;
  /** Fibre coupling of the solved field, and of elliptic Gaussians of the same mode sizes; null without a fibre. */
  readonly coupling_solved: number | null;
  readonly coupling_gaussian: number | null;
}

/** Whose waves, and what was solved for them. */
export interface FactsQuestion {
  readonly model: PlatformModel;
  readonly designs: SolvedDesigns | null;
  readonly waves: ThreeWaves;
  readonly request: LoadedRequest | null;
}

/** What a design shows at each of the three waves. @throws RangeError beyond the index's limits */
export function waveFacts(
  { model, designs, waves, request }: FactsQuestion,
  geometry: GuideGeometry,
  temperatureC: number,
): ModeFacts[] {
  const arms = [
    ["pump", waves.lambdaP, waves.polP, undefined],
    ["signal", waves.lambdaS, waves.polS, request?.request.signal.fibre_mfd_um],
    ["idler", waves.lambdaI, waves.polI, request?.request.idler?.fibre_mfd_um],
  ] as const;
  return arms.map(([wave, lambda, pol, fibre_um]): ModeFacts => {
    const solved = designs === null ? null : solvedOutputAt(designs.outputs, geometry, pol, lambda);
    const output = solved === null || solved.result.cutOff ? null : solved.result;
    const fibre = fibre_um === undefined ? undefined : fibre_um * 1e-6;
    const coupled = output?.fibres.find((f) => fibre !== undefined && Math.abs(f.mfd / fibre - 1) < 1e-9);
    return {
      wave,
      wavelength_nm: toNm(lambda),
      polarisation: pol,
      n_eff: model.index.nEff(pol, lambda, temperatureC, geometry),
      group_index: model.index.groupIndex(pol, lambda, temperatureC, geometry),
      modes: output === null ? null : output.modes.even + output.modes.odd,
      mfd_x_um: output === null ? null : output.shape.mfdX * 1e6,
      mfd_y_um: output === null ? null : output.shape.mfdY * 1e6,
      coupling_solved: coupled?.value ?? null,
      coupling_gaussian: output === null || fibre === undefined
        ? null
        : centredOverlap([output.shape.mfdX, output.shape.mfdY], [fibre, fibre]),
    };
  });
}
