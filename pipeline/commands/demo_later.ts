import { dieOfGuide } from "../../shared/ids.ts";
import type { LaterReading } from "../../fixtures/demo_lots.ts";
import { wrap } from "../console/mod.ts";
import { ingestFolder } from "../ingest/mod.ts";
import { type Ledger, type Manifest, openLedger } from "../ledger/mod.ts";
import { type RankedEntry, type RankedFigure, rankGuides } from "../query/rank.ts";
import { runSql } from "../query/sql.ts";
import type { LoadedRequest } from "../requests.ts";
import { readingText } from "./explain_text.ts";
import { SHORT } from "./figure_titles.ts";

/** The run that took a later reading of a lot in; null before that. */
export async function laterRun(ledger: Ledger, lot: string, later: LaterReading): Promise<Manifest | null> {
  const runs = await ledger.runs();
  return runs.find((r) =>
    r.kind === "ingest" && r.lot === lot && r.inputs.some((i) => i.name === later.file)
  ) ??
    null;
}

/** Takes the later folder in, unless the ledger holds it. */
export async function takeLater(directory: string, folder: string): Promise<void> {
  await using ledger = await openLedger(directory, { write: true });
  await ingestFolder(folder, ledger);
}

/** The die that waits, as it stood before and after its reading. */
export interface Settled {
  readonly run: Manifest;
  readonly before: RankedEntry | undefined;
  /** Readings that could be taken then, best first, with the share of the doubt that each takes away. */
  readonly readings: readonly { readonly kind: string; readonly settles: number }[];
  readonly after: RankedEntry | undefined;
  /** Whether the figures now rest on the guide's own reading. */
  readonly measured: boolean;
  /** Files of readings in force, before and after. */
  readonly files: readonly [number, number];
}

/** Looks at a die in the ledger as it stood before its later reading, and as it stands now. */
export async function settledBy(
  directory: string,
  lot: string,
  later: LaterReading,
  request: LoadedRequest,
): Promise<Settled> {
  await using now = await openLedger(directory, { write: false });
  const run = (await laterRun(now, lot, later))!;
  await using past = await openLedger(directory, { write: false, upTo: run.sequence - 1 });
  const die = dieOfGuide(later.guide);
  const ofDie = async (ledger: Ledger) =>
    (await rankGuides(ledger, request, { lots: [lot], allGuides: false, top: null })).dies.find((d) =>
      d.die === die
    );
  const { rows: worth } = await runSql(
    past,
    `SELECT DISTINCT place, kind, reduction / doubt FROM next_readings WHERE lot = ${
      text(lot)
    } AND request = ${text(later.request)} AND guide_id = ${text(later.guide)} ORDER BY place`,
  );
  const { rows: used } = await runSql(
    now,
    `SELECT count(*)::INT FROM used_traits WHERE lot = ${text(lot)} AND request = ${
      text(later.request)
    } AND guide_id = ${text(later.guide)} AND trait = ${text(later.trait)} AND basis = 'measured'`,
  );
  const files = async (ledger: Ledger) => (await ledger.activeFiles(lot)).length;
  return {
    run,
    before: await ofDie(past),
    readings: worth.map(([, kind, settles]) => ({ kind: String(kind), settles: Number(settles) })),
    after: await ofDie(now),
    measured: Number(used[0]![0]) > 0,
    files: [await files(past), await files(now)],
  };
}

/** What is not so of a die that its later reading should have settled, as sentences. */
export function missedSettling(
  later: LaterReading,
  { run, before, readings, after, measured, files }: Settled,
  request: LoadedRequest,
): string[] {
  const missed: string[] = [];
  const need = (holds: boolean, otherwise: string) => {
    if (!holds) missed.push(otherwise);
  };
  const { guide, kind, trait, figure, truth, file } = later;
  need(
    before?.decision === "hold" && before.guide === guide,
    `${guide} stands for its die and is held; ${before?.guide} is ${before?.decision}`,
  );
  const next = before?.next_reading;
  need(
    next?.kind === kind && next.reads.some((r) => r.trait === trait),
    `the next reading is ${kind} for ${trait}; it is ${next?.kind}`,
  );
  const [best, second] = readings;
  need(
    best !== undefined && best.settles > 2 * (second?.settles ?? 0),
    `the next reading takes away most of the doubt by far; shares ${
      readings.map((r) => r.settles.toFixed(2))
    }`,
  );
  const input = run.inputs.find((i) => i.name === file)!;
  need(input.rows > 0 && input.accepted === input.rows, `all ${input.rows} rows of ${file} are taken in`);
  need(
    files[1] === files[0] + 1,
    `the lot's ${files[0]} files stay in force beside ${file}; ${files[1]} are`,
  );
  need(measured, `${trait} of ${guide} now counts as measured`);
  const limits = request.requirements.filter((r) => r.figure === figure);
  const good = limits.every(({ atLeast, atMost }) =>
    truth >= (atLeast ?? -Infinity) && truth <= (atMost ?? Infinity)
  );
  need(
    after?.guide === guide && after.decision === (good ? "accept" : "reject"),
    `${guide} is ${good ? "accepted" : "rejected"} now, as it is in truth; it is ${after?.decision}`,
  );
  const found = after?.figures[figure];
  need(
    found?.mean != null && Math.abs(found.mean - truth) < 3 * found.u!,
    `${figure} is ${truth.toPrecision(3)} in truth; predicted is ${found?.mean} ± ${found?.u}`,
  );
  return missed;
}

/** The same in words, for a screen of 80 columns. */
export function settledText(lot: string, later: LaterReading, settled: Settled): string {
  const { run, before, after } = settled;
  const { guide, file, folder, request, figure, truth } = later;
  const state = (entry: RankedEntry | undefined) => {
    if (entry === undefined) return "not ranked";
    const { [figure]: asked, operating_temperature_c: oven } = entry.figures;
    const unit = SHORT[figure] ?? figure;
    return `${entry.decision}, probability ${entry.probability.toFixed(2)}, ${withU(asked)} ${unit} at ${
      withU(oven)
    } °C`;
  };
  const rows = run.inputs.find((i) => i.name === file)?.accepted ?? 0;
  const next = before?.next_reading;
  return [
    `before  ${guide} stands for its die; for ${request} it is: ${state(before)}`,
    `        What rank names against the doubt: ${next === undefined ? "nothing" : readingText(next)}`,
    `then    ${rows} rows of ${file} come in runs/${folder}; ${lot} is predicted again for this request alone`,
    `after   ${guide}: ${state(after)}; in truth ${truth.toFixed(0)}`,
  ].map((line) => `${line.slice(0, 8)}${wrap(line.slice(8), 72).join("\n        ")}`).join("\n");
}

/** Mean ± u, as many decimals as u needs for two digits. */
function withU({ mean, u }: RankedFigure): string {
  if (mean === null || u === null) return "no value";
  const decimals = u > 0 ? Math.max(0, 1 - Math.floor(Math.log10(u))) : 1;
  return `${mean.toFixed(decimals)} ± ${u.toFixed(decimals)}`;
}

const text = (value: string): string => `'${value.replaceAll("'", "''")}'`;
