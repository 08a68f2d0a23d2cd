import { refsOf } from "../traits/trait_row.ts";
import { type LotReadings, placeOf, type Reduced, uncertaintyOf } from "./lot_readings.ts";

/** Mode sizes: one trait per reading and axis; repeats are averaged where they are used. */
export function reduceModes({ modes, design, platform }: LotReadings): Reduced {
  const traits = modes.flatMap((reading) => {
    const { u, from } = uncertaintyOf(reading.u_mfd_um, platform.defaults.u_mfd_um);
    const common = {
      ...placeOf(reading, design),
      wavelength_nm: reading.wavelength_nm,
      polarisation: reading.polarisation,
      process: null,
      u,
      u_from: from,
      method: "mode-field diameter, 1/e² intensity",
      readings: refsOf("modes", [reading]),
      detail: null,
    };
    return [
      { ...common, trait: "mfd_x_um" as const, value: reading.mfd_x_um },
      { ...common, trait: "mfd_y_um" as const, value: reading.mfd_y_um },
    ];
  });
  return { traits, remarks: [] };
}

/** Facet spectra: one trait per reading of a coating run's witness. */
export function reduceFacets({ facets, platform }: LotReadings): Reduced {
  const traits = facets.map((reading) => {
    const { u, from } = uncertaintyOf(reading.u_reflectivity, platform.defaults.u_reflectivity);
    return {
      trait: "reflectivity" as const,
      scope: "coating_run" as const,
      unit: `${reading.coating_run}|${reading.facet}`,
      wafer: null,
      die_id: null,
      guide_id: null,
      width_um: null,
      wavelength_nm: reading.wavelength_nm,
      polarisation: null,
      process: null,
      value: reading.reflectivity,
      u,
      u_from: from,
      method: "witness reflectivity",
      readings: refsOf("facets", [reading]),
      detail: null,
    };
  });
  return { traits, remarks: [] };
}
