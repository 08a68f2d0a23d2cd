import { type Cell, csvText, textTable, wrap } from "../console/mod.ts";
import { InputError } from "../../shared/errors.ts";
import { type Ledger, openLedger, requestOf } from "../ledger/mod.ts";
import {
  type Flag,
  flagsOf,
  loadFacts,
  loadRules,
  loadSummaries,
  predictionsInForce,
  refText,
  type Rule,
  suspectName,
  suspectSentence,
} from "../query/flag/mod.ts";
import { findRequest, loadAllRequests, type LoadedRequest } from "../requests.ts";
import { type CommonOptions, note, print, printJson } from "./common.ts";
import { bringUpToDate, chosenLots } from "./predictions.ts";

export interface FlagCommandOptions extends CommonOptions {
  readonly request: readonly string[];
  readonly rules?: string;
}

/** Exit 1 when something is to be decided or looked at. */
export async function flagCommand(lot: string | undefined, options: FlagCommandOptions): Promise<0 | 1> {
  const rules = await loadRules(options.rules);
  const { lots, requests } = await prepare(lot === undefined ? [] : [lot], options);
  await using ledger = await openLedger(options.ledger, { write: false });
  const flags: Flag[] = [];
  for (const each of lots) flags.push(...(await flagsOfLot(ledger, each, requests, rules, options)).flags);
  if (options.format === "json") printJson({ flags });
  else if (options.format === "csv") print(csvFlags(flags));
  else printTable(flags, lots);
  return flags.some((f) => f.severity !== "note") ? 1 : 0;
}

/** Names of the requests given by the user, or null; predictions of the lots brought up to date. */
export async function prepare(
  asked: readonly string[],
  options: CommonOptions & { readonly request: readonly string[] },
): Promise<{ lots: string[]; requests: string[] | null; loaded: readonly LoadedRequest[] }> {
  const named = await Promise.all(options.request.map((r) => findRequest(r, options.requests)));
  let lots: string[];
  const held = new Map<string, string[]>();
  {
    await using ledger = await openLedger(options.ledger, { write: false });
    lots = await chosenLots(ledger, asked);
    for (const lot of lots) {
      held.set(lot, (await predictionsInForce(ledger, lot)).map((run) => requestOf(run)!));
    }
  }
  const loaded = new Map(named.map((r) => [r.name, r]));
  for (const lot of lots) {
    const requests = [...named, ...await known(held.get(lot)!.filter((name) => !loaded.has(name)), options)];
    // Nothing predicted and nothing named: every request at hand, as `predict` does.
    const wanted = requests.length > 0 ? requests : await loadAllRequests(options.requests);
    wanted.forEach((r) => loaded.set(r.name, r));
    await bringUpToDate(options, [lot], wanted);
  }
  return {
    lots,
    requests: named.length === 0 ? null : named.map((r) => r.name),
    loaded: [...loaded.values()],
  };
}

/** Requests that were predicted before and whose files are at hand; others are used as the ledger holds them. */
async function known(names: readonly string[], { requests }: CommonOptions): Promise<LoadedRequest[]> {
  const out: LoadedRequest[] = [];
  for (const name of names) {
    try {
      out.push(await findRequest(name, requests));
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      note(`remark: the file of request ${name} is not at hand; its prediction is used as it was made`);
    }
  }
  return out;
}

/** Facts and flags of one lot. */
export async function flagsOfLot(
  ledger: Ledger,
  lot: string,
  requests: readonly string[] | null,
  rules: readonly Rule[],
  { platforms }: Pick<CommonOptions, "platforms">,
) {
  const own = platforms === undefined ? {} : { platforms };
  const facts = await loadFacts(ledger, lot, {
    requests,
    figures: rules.flatMap((r) => r.kind === "figure_limit" ? [r.figure] : []),
    ...own,
  });
  const summaries = await loadSummaries(ledger, facts.platform.platform, platforms);
  return { facts, summaries, flags: flagsOf(facts, rules, summaries) };
}

function csvFlags(flags: readonly Flag[]): string {
  const titles = ["lot", "scope", "id", "rule", "severity", "statement", "readings", "suspects"];
  return csvText(
    titles,
    flags.map((f): Cell[] => [
      f.lot,
      f.scope,
      f.id,
      f.rule,
      f.severity,
      f.statement,
      f.evidence.readings.map((r) => refText(r)).join("; "),
      f.suspects.map((s) => `${suspectName(s)} (p ${s.p_value.toPrecision(2)})`).join("; "),
    ]),
  );
}

function printTable(flags: readonly Flag[], lots: readonly string[]): void {
  if (flags.length === 0) print(`Nothing is flagged in ${lots.join(", ")}`);
  else {
    const columns = ["severity", "scope", "id", "rule", "lot"].map((title) => ({ title }));
    print(textTable(columns, flags.map((f) => [f.severity, f.scope, f.id, f.rule, f.lot]), { width: 80 }));
  }
  for (const f of flags) {
    // The widest head, WATCH and two spaces, and a line fit 80 columns.
    print(`\n${f.severity.toUpperCase()}  ${wrap(f.statement, 73).join("\n      ")}`);
    const lines = [
      ...f.evidence.readings.slice(0, 4).map((r) => `read in ${refText(r)}`),
      ...f.suspects.slice(0, 3).map((s) => `suspect: ${suspectSentence(s)}`),
    ];
    for (const line of lines) print(`      ${wrap(line, 72).join("\n        ")}`);
  }
}
