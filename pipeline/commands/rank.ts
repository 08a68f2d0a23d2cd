import { type Cell, csvText, textTable, wrap } from "../console/mod.ts";
import { type Figure, FIGURES } from "../../shared/schemas/figures.ts";
import { openLedger } from "../ledger/mod.ts";
import { mostlyUnmatched } from "../query/limits.ts";
import { type RankedEntry, rankGuides, type Ranking } from "../query/rank.ts";
import { findRequest, type LoadedRequest } from "../requests.ts";
import { budgetText } from "./budget_text.ts";
import { type CommonOptions, note, print, printJson } from "./common.ts";
import { explainIn } from "../query/explain.ts";
import { lotOf } from "../query/trace_find.ts";
import { EXPLAIN_COLUMNS, explainRows, explainText, readingText } from "./explain_text.ts";
import { SHORT } from "./figure_titles.ts";
import { bringUpToDate, chosenLots } from "./predictions.ts";

export interface RankCommandOptions extends CommonOptions {
  readonly lot: readonly string[];
  readonly allGuides?: true;
  readonly top?: number;
  /** A die or guide whose decision is explained in place of a ranking. */
  readonly explain?: string;
}

/** Ranks for a request; predictions that are missing or no longer hold are computed first. */
export async function rankCommand(nameOrPath: string, options: RankCommandOptions): Promise<0> {
  const request = await findRequest(nameOrPath, options.requests);
  if (options.explain !== undefined) return await explainCommand(request, options.explain, options);
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

/** Explains one guide; the prediction of its lot is computed first where it no longer holds. */
async function explainCommand(
  request: LoadedRequest,
  id: string,
  options: RankCommandOptions,
): Promise<0> {
  let lot: string;
  {
    await using ledger = await openLedger(options.ledger, { write: false });
    ({ lot } = await lotOf(ledger, id));
  }
  await bringUpToDate(options, [lot], [request]);
  await using ledger = await openLedger(options.ledger, { write: false });
  const explained = await explainIn(ledger, request, id, options.platforms);
  if (options.format === "json") printJson(explained);
  else if (options.format === "csv") print(csvText([...EXPLAIN_COLUMNS], explainRows(explained)));
  else print(explainText(explained));
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
    { title: "guide", whole: true },
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
  printNextReadings(dies);
  const best = dies[0];
  if (best !== undefined && best.unavailable === undefined) print(`\n${budgetText(best, request)}`);
  for (const text of new Set(dies.flatMap((d) => d.remarks ?? []).map((r) => r.split(":", 1)[0]!))) {
    const count = dies.filter((d) => (d.remarks ?? []).some((r) => r.startsWith(text))).length;
    const example = dies.flatMap((d) => d.remarks ?? []).find((r) => r.startsWith(text))!;
    note(`remark on ${count} of ${dies.length}: ${example}`);
  }
}

/** For held dies the reading that promises most, dies with the same advice in one paragraph. */
function printNextReadings(entries: readonly RankedEntry[]): void {
  const byReading = new Map<string, RankedEntry[]>();
  for (const entry of entries) {
    if (entry.next_reading === undefined) continue;
    const { kind, reads } = entry.next_reading;
    const name = `${kind} ${reads.map((r) => `${r.trait} ${r.wavelength_nm}`).join()}`;
    byReading.set(name, [...byReading.get(name) ?? [], entry]);
  }
  for (const held of byReading.values()) {
    const [first] = held;
    const where = held.length === 1 ? first!.guide : `${held.map((e) => e.guide).join(", ")}; for the first`;
    print(wrap(`next reading of ${where}: ${readingText(first!.next_reading!)}`, 80).join("\n"));
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

/** No draw has an operating point: the temperature shown is only the nearest one. */
const isUnmatched = ({ figures: { operating_temperature_c: t, operating_pump_nm: pump } }: RankedEntry) =>
  t.mean !== null && pump.mean === null;

function limitText(
  { limited_by, probability, matched }: RankedEntry,
  { requirements }: LoadedRequest,
): string {
  if (limited_by === null) return "";
  if (mostlyUnmatched(probability, matched)) return "no match";
  const asked = requirements.some((r) => r.figure === limited_by);
  return asked ? SHORT[limited_by as Figure] ?? limited_by : "no match";
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
