import { type Cell, csvText, textTable, wrap } from "../console/mod.ts";
import { type Figure, FIGURES } from "../../shared/schemas/figures.ts";
import { openLedger } from "../ledger/mod.ts";
import { type RankedEntry, rankGuides, type Ranking } from "../query/rank.ts";
import { findRequest, type LoadedRequest } from "../requests.ts";
import { budgetText } from "./budget_text.ts";
import { type CommonOptions, note, print, printJson } from "./common.ts";
import { bringUpToDate, chosenLots } from "./predictions.ts";

export interface RankCommandOptions extends CommonOptions {
  readonly lot: readonly string[];
  readonly allGuides?: true;
  readonly top?: number;
}

/** Ranks for a request; predictions that are missing or no longer hold are computed first. */
export async function rankCommand(nameOrPath: string, options: RankCommandOptions): Promise<0> {
  const request = await findRequest(nameOrPath, options.requests);
  let lots: string[];
  {
    await using ledger = await openLedger(options.ledger, { write: false });
    lots = await chosenLots(ledger, options.lot);
  }
  await bringUpToDate(options, lots, [request]);
  await using ledger = await openLedger(options.ledger, { write: false });
  const ranking = await rankGuides(ledger, request, {
    lots,
    allGuides: options.allGuides === true,
    top: options.top ?? null,
  });
  if (options.format === "json") printJson(ranking);
  else if (options.format === "csv") print(csvRanking(ranking));
  else printTable(ranking, request, options);
  return 0;
}

function csvRanking({ dies }: Ranking): string {
  const titles = [
    "die",
    "guide",
    "decision",
    "probability",
    "limited_by",
    "qualifying_guides",
    "unavailable",
  ];
  const parts = ["mean", "u", "lo", "hi", "probability", "basis"] as const;
  const figureTitles = FIGURES.flatMap((f) => parts.map((p) => `${f}.${p}`));
  const rows = dies.map((d): Cell[] => [
    d.die,
    d.guide,
    d.decision,
    d.probability,
    d.limited_by,
    d.qualifying_guides,
    d.unavailable ?? null,
    ...FIGURES.flatMap((f) => parts.map((p) => d.figures[f][p])),
  ]);
  return csvText([...titles, ...figureTitles], rows);
}

function printTable(ranking: Ranking, request: LoadedRequest, options: RankCommandOptions): void {
  const { dies, guides_considered, lots } = ranking;
  print(`${ranking.request}: ${describe(request)}`);
  print(`${lots.length === 1 ? "Lot" : "Lots"} ${lots.join(", ")}, ${guides_considered} guides considered\n`);
  const shown = request.requirements.map((r) => r.figure).filter((f, k, all) => all.indexOf(f) === k).slice(
    0,
    3,
  );
  const columns = [
    { title: "guide" },
    { title: "decision" },
    { title: "prob", align: "right" as const },
    { title: "T/°C", align: "right" as const },
    ...shown.map((f) => ({ title: SHORT[f] ?? f, align: "right" as const })),
    ...(options.allGuides ? [] : [{ title: "pass", align: "right" as const }]),
    { title: "limit" },
  ];
  print(textTable(columns, dies.map((d) => tableRow(d, shown, options, request)), { width: 80 }));
  print(LEGEND);
  if (dies.some(isUnmatched)) print("(T): nothing matches in the oven; T is the nearest temperature");
  printUnavailable(dies);
  const best = dies[0];
  if (best !== undefined && best.unavailable === undefined) print(`\n${budgetText(best, request)}`);
  for (const text of new Set(dies.flatMap((d) => d.remarks ?? []).map((r) => r.split(":", 1)[0]!))) {
    const count = dies.filter((d) => (d.remarks ?? []).some((r) => r.startsWith(text))).length;
    const example = dies.flatMap((d) => d.remarks ?? []).find((r) => r.startsWith(text))!;
    note(`remark on ${count} of ${dies.length}: ${example}`);
  }
}

/** Why dies can't be shipped, one line per reason. */
function printUnavailable(entries: readonly RankedEntry[]): void {
  const byReason = new Map<string, Set<string>>();
  for (const { die, unavailable } of entries) {
    if (unavailable === undefined) continue;
    byReason.set(unavailable, (byReason.get(unavailable) ?? new Set()).add(die));
  }
  for (const [reason, dies] of byReason) {
    print(wrap(`unavailable, ${reason}: ${[...dies].join(", ")}`, 80).join("\n"));
  }
}

const LEGEND = "m: measured on the guide; d, w, l: from die, wafer, lot; p: platform's default";

/** Column headings that leave room for three figures in 80 columns. */
const SHORT: Partial<Record<Figure, string>> = {
  operating_temperature_c: "oven/°C",
  efficiency_percent_per_w: "%/W",
  efficiency_percent_per_w_cm2: "%/Wcm²",
  peak_conversion: "convers.",
  pairs_per_pulse: "pairs",
  pair_rate_hz: "pairs/s",
  heralding_signal: "herald.s",
  heralding_idler: "herald.i",
  purity: "purity",
  schmidt_number: "K",
  g2_heralded: "g2",
  g2_unheralded: "g2unh.",
  exchange_overlap: "overlap",
  acceptance_nm: "acc./nm",
  bandwidth_signal_nm: "bw.s/nm",
  bandwidth_idler_nm: "bw.i/nm",
  loss_db_cm_signal: "dB/cm s",
  loss_db_cm_idler: "dB/cm i",
};

/** No draw has an operating point: the temperature shown is only the nearest one. */
const isUnmatched = ({ figures: { operating_temperature_c: t, operating_pump_nm: pump } }: RankedEntry) =>
  t.mean !== null && pump.mean === null;

function limitText({ limited_by }: RankedEntry, { requirements }: LoadedRequest): string {
  if (limited_by === null) return "";
  const asked = requirements.some((r) => r.figure === limited_by);
  return asked ? SHORT[limited_by as Figure] ?? limited_by : "no root";
}

function tableRow(
  d: RankedEntry,
  shown: readonly Figure[],
  options: RankCommandOptions,
  request: LoadedRequest,
): Cell[] {
  const t = d.figures.operating_temperature_c;
  return [
    d.guide,
    d.decision,
    d.probability.toFixed(2),
    t.mean === null ? "–" : isUnmatched(d) ? `(${t.mean.toFixed(1)})` : t.mean.toFixed(1),
    ...shown.map((f) => {
      const { mean, basis } = d.figures[f];
      return mean === null ? "–" : `${Number(mean.toPrecision(3))} ${basis[0]}`;
    }),
    ...(options.allGuides ? [] : [`${d.qualifying_guides}/${d.guides_of_die}`]),
    d.unavailable !== undefined ? "unavail." : limitText(d, request),
  ];
}

function describe({ request, waves, processKey }: LoadedRequest): string {
  const [p, s, i] = [waves.lambdaP, waves.lambdaS, waves.lambdaI].map((l) => Number((l * 1e9).toFixed(2)));
  switch (request.process) {
    case "second-harmonic":
      return `second harmonic of ${s} nm to ${p} nm, ${processKey}`;
    case "sum-frequency":
      return `sum frequency of ${s} nm and ${i} nm to ${p} nm, ${processKey}`;
    case "difference-frequency":
      return `difference frequency of ${p} nm and ${s} nm to ${i} nm, ${processKey}`;
    case "pair-generation":
      return `pairs at ${s} nm and ${i} nm from ${p} nm, ${processKey}`;
  }
}
