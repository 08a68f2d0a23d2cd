import { GEOMETRY_PARAMETERS, processName } from "../../models/guides/mod.ts";
import type { CheckedRequest } from "../../shared/schemas/request.ts";
import { type TableShape, type TableStream, tableStream } from "../ledger/mod.ts";
import { wavelengthNm } from "../traits/guide_traits.ts";
import type { ContradictingReading, TraitPools } from "../traits/pools.ts";

export const CONTRADICTION_SHAPE = {
  lot: "text",
  request: "text",
  trait: "text",
  wavelength_nm: "f64",
  polarisation: "text",
  process: "text",
  unit: "text",
  value: "f64",
  expected: "f64",
  u_expected: "f64",
  standardised: "f64",
  p: "f64",
  readings: "text",
} as const satisfies TableShape;

/**
 * Readings of a lot that contradict the others of their trait, for every trait that a request's predictions rest on, each as
 * it is pooled for that request.
 */
export function contradictionsOf(pools: TraitPools, { waves }: CheckedRequest): ContradictingReading[] {
  const { lambdaP, lambdaS, lambdaI, polP, polS, polI } = waves;
  const arms = [[lambdaS, polS], [lambdaI, polI]] as const;
  const found = [
    ...[[lambdaP, polP] as const, ...arms].flatMap(([lambda, pol]) =>
      pools.contradictions("loss_db_cm", wavelengthNm(lambda), pol)
    ),
    ...arms.flatMap(([lambda, pol]) =>
      (["mfd_x_um", "mfd_y_um"] as const).flatMap((t) => pools.contradictions(t, wavelengthNm(lambda), pol))
    ),
    ...pools.contradictions("duty", null, null),
    ...GEOMETRY_PARAMETERS.flatMap((parameter) =>
      pools.contradictions(parameter === "width_um" ? "width_error_um" : parameter, null, null)
    ),
    ...pools.contradictions(
      "mismatch_offset_per_m",
      wavelengthNm(2 * lambdaP),
      null,
      processName(polP, polS, polI),
    ),
  ];
  // Signal and idler may be one wave: its readings are named once.
  const seen = new Set<string>();
  return found.filter((c) => {
    const key = `${c.trait}|${c.unit}|${c.used.join()}`;
    return !seen.has(key) && seen.add(key);
  });
}

export function contradictionTable(
  lot: string,
  request: string,
  found: readonly ContradictingReading[],
  pools: TraitPools,
): TableStream {
  const column = <K extends keyof ContradictingReading>(name: K) => found.map((c) => c[name]);
  return tableStream(CONTRADICTION_SHAPE, {
    lot: found.map(() => lot),
    request: found.map(() => request),
    trait: column("trait"),
    wavelength_nm: column("wavelength_nm"),
    polarisation: column("polarisation"),
    process: column("process"),
    unit: column("unit"),
    value: column("value"),
    expected: column("expected"),
    u_expected: column("uExpected"),
    standardised: column("standardised"),
    p: column("p"),
    readings: found.map((c) => JSON.stringify(c.used.flatMap((k) => pools.rows[k]!.readings))),
  });
}

/** A contradiction as a sentence: the lines read, what they say, and what the others lead one to expect. */
export function contradictionText(
  { trait, unit, value, expected, uExpected, used, wavelength_nm, polarisation }: ContradictingReading,
  pools: TraitPools,
): string {
  const lines = used.flatMap((k) => pools.rows[k]!.readings).flatMap(({ file_name, lines }) =>
    lines.map(([first, last]) => `${file_name}:${first === last ? first : `${first}-${last}`}`)
  );
  const at = [
    wavelength_nm === null ? "" : ` at ${Number(wavelength_nm.toFixed(2))} nm`,
    polarisation === null ? "" : ` ${polarisation}`,
  ].join("");
  const shown = lines.length > 3 ? [...lines.slice(0, 3), `… ${lines.length - 3} more`] : lines;
  return `${unit}: ${trait}${at} of ${Number(value.toPrecision(4))} (${
    shown.join(", ")
  }) contradicts the other ` +
    `readings, which lead to ${Number(expected.toPrecision(4))} ± ${
      Number(uExpected.toPrecision(2))
    }; it is kept`;
}
