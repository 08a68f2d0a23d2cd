import { InputError } from "../../shared/errors.ts";
import { csvText } from "../console/mod.ts";
import { openLedger } from "../ledger/mod.ts";
import { traceFigure } from "../query/trace.ts";
import { findRequest, loadRequestFile } from "../requests.ts";
import { type CommonOptions, note, print, printJson } from "./common.ts";
import { TRACE_COLUMNS, traceRows } from "./trace_rows.ts";
import { traceText } from "./trace_text.ts";

export interface TraceCommandOptions extends CommonOptions {
  readonly figure: string;
  readonly request?: string;
}

/** Shows what a figure of a guide (of a die: of its best guide) rests on; computes nothing and writes nothing. */
export async function traceCommand(id: string, options: TraceCommandOptions): Promise<0> {
  await using ledger = await openLedger(options.ledger, { write: false });
  const request = await requestAsked(options);
  const trace = await traceFigure(ledger, id, {
    figure: options.figure,
    request: request.name,
    ...(options.platforms === undefined ? {} : { platforms: options.platforms }),
    ...(request.fingerprint === undefined ? {} : { requestFingerprint: request.fingerprint }),
  });
  for (const remark of trace.remarks) note(`remark: ${remark}`);
  if (options.format === "json") printJson(trace);
  else if (options.format === "csv") print(csvText(TRACE_COLUMNS, traceRows(trace)));
  else print(traceText(trace));
  return 0;
}

/**
 * The request's name, and its file's fingerprint where the file is at hand: the ledger holds what was predicted for, so
 * that a trace needs no request file, but one that has changed since should be said.
 */
async function requestAsked(
  { request, requests }: TraceCommandOptions,
): Promise<{ name: string | null; fingerprint?: string }> {
  if (request === undefined) return { name: null };
  if (request.endsWith(".json") || request.includes("/")) {
    const { name, fingerprint } = await loadRequestFile(request);
    return { name, fingerprint };
  }
  try {
    return { name: request, fingerprint: (await findRequest(request, requests)).fingerprint };
  } catch (error) {
    if (error instanceof InputError) return { name: request };
    throw error;
  }
}
