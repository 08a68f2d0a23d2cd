import { InputError } from "../../shared/errors.ts";
import { type Figure, FIGURES } from "../../shared/schemas/figures.ts";
import { didYouMean, nearestWord } from "../../shared/schemas/nearest.ts";
import { type CheckedRequest, checkRequest, requestSchema } from "../../shared/schemas/request.ts";
import { LedgerError } from "../../shared/errors.ts";
import { type Ledger, type Manifest, requestOf } from "../ledger/mod.ts";
import { lotsOf, recordsOf } from "../records.ts";

/** What a prediction run states about itself. */
export interface PredictParameters {
  readonly request: string;
  readonly request_sha256: string;
  readonly platform: string;
  readonly platform_sha256: string;
  readonly definition: unknown;
}

/** A figure by its name. @throws InputError with the nearest name */
export function figureNamed(name: string): Figure {
  if ((FIGURES as readonly string[]).includes(name)) return name as Figure;
  throw new InputError(
    `Unknown figure ${JSON.stringify(name)}${didYouMean(nearestWord(name, FIGURES))}: figures are ${
      FIGURES.join(", ")
    }`,
    { value: name },
  );
}

/** The lot that a die or guide belongs to. @throws InputError with the nearest id when no lot of the ledger has it */
export async function lotOf(ledger: Ledger, id: string): Promise<{ lot: string; isDie: boolean }> {
  const found: { lot: string; isDie: boolean }[] = [];
  const known = new Set<string>();
  for (const lot of await lotsOf(ledger)) {
    const guides = await recordsOf(ledger, "guides", lot);
    const isGuide = guides.some((g) => g.guide_id === id);
    if (isGuide || guides.some((g) => g.die_id === id)) found.push({ lot, isDie: !isGuide });
    for (const { die_id, guide_id } of guides) known.add(die_id).add(guide_id);
  }
  if (found.length === 1) return found[0]!;
  if (found.length > 1) {
    throw new InputError(`Cannot trace ${id}: lots ${found.map((f) => f.lot).join(" and ")} both have it`, {
      value: id,
    });
  }
  const hint = [...known].some((other) => other.startsWith(`${id}/`)) ? "; it is a wafer" : "";
  throw new InputError(
    `Unknown die or guide ${JSON.stringify(id)}${didYouMean(nearestFullId(id, [...known]))}${hint}: ` +
      `need a full id, such as ${known.values().next().value ?? "K07-1/05/g12"}`,
    { value: id },
  );
}

/** The full id most likely meant: the same apart from case and zeros, else the end of one id alone, else one near in letters. */
export function nearestFullId(id: string, known: readonly string[]): string | null {
  const fold = (text: string) => text.toLowerCase().replace(/0*(\d+)/g, "$1");
  const wanted = fold(id);
  const same = known.find((other) => fold(other) === wanted);
  if (same !== undefined) return same;
  const ends = known.filter((other) => fold(other).endsWith(`/${wanted}`));
  if (ends.length > 0) return ends.length === 1 ? ends[0]! : null;
  const depth = id.split("/").length;
  return nearestWord(id, known.filter((other) => other.split("/").length === depth));
}

/** The prediction in force of a lot for a request, or the only one. @throws InputError with what there is */
export async function predictionOf(
  ledger: Ledger,
  lot: string,
  request: string | null,
): Promise<{ run: Manifest; parameters: PredictParameters }> {
  const runs = (await ledger.runsInForce("predict")).filter((run) => run.lot === lot);
  const names = runs.map((run) => requestOf(run)!);
  if (runs.length === 0) {
    throw new InputError(
      `Cannot trace: the ledger holds no prediction of lot ${lot}; run predict ${lot} first`,
      { value: lot },
    );
  }
  if (request === null && runs.length > 1) {
    throw new InputError(
      `Cannot trace: lot ${lot} is predicted for ${runs.length} requests; name one with --request: ${
        names.join(", ")
      }`,
    );
  }
  const run = request === null ? runs[0] : runs[names.indexOf(request)];
  if (run === undefined) {
    throw new InputError(
      `Cannot trace: the ledger holds no prediction of lot ${lot} for request ${JSON.stringify(request)}${
        didYouMean(nearestWord(request!, names))
      }; predicted are ${names.join(", ")}`,
      { value: request! },
    );
  }
  return { run, parameters: run.parameters as PredictParameters };
}

/** The request that a run states, checked anew. @throws LedgerError when the program no longer takes it */
export function requestInRun(run: Manifest, { definition }: PredictParameters): CheckedRequest {
  const parsed = requestSchema.safeParse(definition);
  const checked = parsed.success ? checkRequest(parsed.data) : null;
  if (checked !== null && !("problems" in checked)) return checked;
  throw new LedgerError(`Cannot trace: run ${run.run} states a request that this program does not take`);
}
