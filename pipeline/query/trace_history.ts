import { waferOf } from "../../shared/ids.ts";
import type { Ledger } from "../ledger/mod.ts";
import { type GuideRecord, rowsOf } from "../records.ts";
import type { Trace, TracedCoating, TracedStep } from "./trace_types.ts";

/** The wafer's steps in their order, and every coating entry of the die. */
export async function historyOf(
  past: Ledger,
  lot: string,
  { die_id }: GuideRecord,
): Promise<Pick<Trace, "wafer" | "steps" | "coatings">> {
  const wafer = waferOf(die_id);
  const rows = async <T>(table: string) =>
    (await past.readActive(table, lot)).flatMap((part) => rowsOf(part.table)) as unknown as T[];
  const source = ({ file_name, source_file, source_line }: TracedStep | TracedCoating) => ({
    file_name,
    source_file,
    source_line,
  });
  const steps = (await rows<Omit<TracedStep, "settings"> & { settings: string }>("steps"))
    .filter((s) => s.wafer === wafer).sort((a, b) => a.order - b.order);
  const coatings = (await rows<TracedCoating & { die_id: string }>("coatings"))
    .filter((c) => c.die_id === die_id)
    .sort((a, b) => a.facet === b.facet ? a.entry - b.entry : a.facet < b.facet ? -1 : 1);
  const record = (await rows<Trace["wafer"]>("wafers")).find((w) => w.wafer === wafer);
  return {
    wafer: {
      wafer,
      diameter_mm: record?.diameter_mm ?? null,
      substrate_batch: record?.substrate_batch ?? null,
    },
    steps: steps.map((s) => {
      const settings = JSON.parse(s.settings) as TracedStep["settings"];
      return {
        wafer,
        order: s.order,
        step: s.step,
        tool: s.tool,
        recipe: s.recipe,
        finished: s.finished,
        settings,
        ...source({ ...s, settings }),
      };
    }),
    coatings: coatings.map((c, k) => ({
      facet: c.facet,
      coating_run: c.coating_run,
      entry: c.entry,
      counts: coatings[k + 1]?.facet !== c.facet,
      ...source(c),
    })),
  };
}
