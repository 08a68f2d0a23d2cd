import type { Cell } from "../console/mod.ts";
import type { Trace, TracedReading, TracedTrait, TracedTraitRow } from "../query/trace_types.ts";

type Line = readonly [trait: TracedTrait, row: TracedTraitRow | null, reading: TracedReading | null];

/** Columns of the CSV: the figure, the trait that it rests on, the trait row, the reading under it. */
const COLUMNS: Readonly<Record<string, (trace: Trace, ...line: Line) => Cell>> = {
  figure: (trace) => trace.figure,
  request: (trace) => trace.request,
  guide: (trace) => trace.guide,
  mean: (trace) => trace.mean,
  figure_u: (trace) => trace.u,
  figure_basis: (trace) => trace.basis,
  reason: (trace) => trace.reason ?? null,
  run: (trace) => trace.run,
  role: (_, trait) => trait.role,
  trait: (_, trait) => trait.trait,
  wavelength_nm: (_, trait) => trait.wavelength_nm,
  polarisation: (_, trait) => trait.polarisation,
  trait_value: (_, trait) => trait.value,
  trait_u: (_, trait) => trait.u,
  basis: (_, trait) => trait.basis,
  from: (_, trait) => trait.from,
  distance: (_, trait) => trait.distance,
  note: (_, trait) => trait.note,
  share_own: (_, trait) => trait.shares?.own ?? null,
  share_die: (_, trait) => trait.shares?.die ?? null,
  share_wafer: (_, trait) => trait.shares?.wafer ?? null,
  share_lot: (_, trait) => trait.shares?.lot ?? null,
  share_other_lots: (_, trait) => trait.shares?.other_lots ?? null,
  share_platform: (_, trait) => trait.shares?.platform ?? null,
  row_trait: (_, _trait, row) => row?.trait ?? null,
  row_unit: (_, _trait, row) => row?.unit ?? null,
  row_method: (_, _trait, row) => row?.method ?? null,
  row_value: (_, _trait, row) => row?.value ?? null,
  row_u: (_, _trait, row) => row?.u ?? null,
  row_u_from: (_, _trait, row) => row?.u_from ?? null,
  table: (_, _trait, _row, reading) => reading?.table ?? null,
  unit: (_, _trait, _row, reading) => reading?.unit ?? null,
  quantity: (_, _trait, _row, reading) => reading?.quantity ?? null,
  value: (_, _trait, _row, reading) => reading?.value ?? null,
  u: (_, _trait, _row, reading) => reading?.u ?? null,
  file_name: (_, _trait, _row, reading) => reading?.file_name ?? null,
  source_line: (_, _trait, _row, reading) => reading?.source_line ?? null,
  rows: (_, _trait, _row, reading) => reading?.rows ?? null,
  value_last: (_, _trait, _row, reading) => reading?.value_last ?? null,
  source_line_last: (_, _trait, _row, reading) => reading?.source_line_last ?? null,
  source_file: (_, _trait, _row, reading) => reading?.source_file ?? null,
  reading: (_, _trait, _row, reading) => (reading?.row ?? null) as Cell,
};

export const TRACE_COLUMNS: readonly string[] = Object.keys(COLUMNS);

/** One row per reading (or stretch of them); one for a trait without any, so that a platform's default is not missing. */
export function traceRows(trace: Trace): Cell[][] {
  const lines = trace.traits.flatMap((trait): Line[] => {
    const readings = [
      ...trait.measured.flatMap((row) => row.readings.map((reading): Line => [trait, row, reading])),
      ...trait.readings.map((reading): Line => [trait, null, reading]),
    ];
    return readings.length > 0 ? readings : [[trait, null, null]];
  });
  return lines.map((line) => Object.values(COLUMNS).map((cell) => cell(trace, ...line)));
}
