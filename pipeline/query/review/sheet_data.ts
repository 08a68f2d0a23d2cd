import { InputError } from "../../../shared/errors.ts";
import { compareIds } from "../../../shared/ids.ts";
import { type Figure, FIGURES } from "../../../shared/schemas/figures.ts";
import type { CheckedRequest } from "../../../shared/schemas/request.ts";
import type { Ledger } from "../../ledger/mod.ts";
import type { SheetData, SheetReading, SheetRequest } from "../../review_types.ts";
import type { LotFacts, PredictionFacts } from "../flag/facts.ts";
import { inPlay } from "../flag/verdicts.ts";
import { num } from "../flag/types.ts";
import { RANKED_FROM, type RankedEntry, rankIn } from "../rank.ts";
import { engineWith } from "../sql.ts";
import { historyOf } from "../trace_history.ts";
import { cautionsOf, provenanceOf } from "./build.ts";
import { budgetRows, describe } from "./request_review.ts";

/** What travels with a chip. @throws InputError for a die that the lot does not have */
export async function sheetOf(ledger: Ledger, facts: LotFacts, die: string): Promise<SheetData> {
  const { lot, design, platform } = facts;
  const guides = design.guidesOfDie.get(die);
  if (guides === undefined) {
    throw new InputError(
      `Unknown die ${JSON.stringify(die)}: lot ${lot} has ${
        [...design.guidesOfDie.keys()].slice(0, 8).join(", ")
      } …`,
      {
        value: die,
      },
    );
  }
  const requests: SheetRequest[] = [];
  const played = inPlay(facts);
  if (played.length > 0) {
    using engine = await engineWith(ledger, RANKED_FROM, { lots: [lot] });
    for (const prediction of played) {
      const ranking = await rankIn(engine, prediction.checked, { lots: [lot], allGuides: false, top: null });
      const entry = ranking.dies.find((d) => d.die === die);
      if (entry !== undefined) requests.push(sheetRequest(facts, prediction, entry));
    }
  }
  const first = guides[0]!;
  const { wafer, steps, coatings } = await historyOf(ledger, lot, first);
  const unavailable =
    facts.predictions.flatMap((p) => p.decisions).find((d) => d.die_id === die)?.unavailable ??
      design.unavailable.get(die)?.reason ?? null;
  return {
    die,
    lot,
    platform: platform.platform,
    wafer: wafer.wafer,
    substrate_batch: wafer.substrate_batch,
    started: facts.started,
    x_mm: first.x_mm,
    y_mm: first.y_mm,
    unavailable,
    guides: [...guides].sort((a, b) => compareIds(a.guide_id, b.guide_id)).map((g) => ({
      guide: g.guide_id,
      group: g.group,
      width_um: g.width_um,
      period_um: g.period_um,
      length_mm: g.length_mm,
    })),
    steps: steps.map(({ step, tool, recipe, finished }) => ({ step, tool, recipe, finished })),
    coatings: coatings.map(({ facet, coating_run, counts }) => ({ facet, coating_run, counts })),
    requests,
    readings: readingsOf(facts, die),
    provenance: await provenanceOf(ledger, facts),
    cautions: cautionsOf(facts),
  };
}

const USUAL: Readonly<Record<string, readonly Figure[]>> = {
  "pair-generation": [
    "pairs_per_pulse",
    "pair_rate_hz",
    "heralding_signal",
    "heralding_idler",
    "purity",
    "g2_heralded",
    "car",
  ],
  "second-harmonic": ["efficiency_percent_per_w", "acceptance_nm", "peak_conversion"],
  "sum-frequency": ["efficiency_percent_per_w", "acceptance_nm", "peak_conversion"],
  "difference-frequency": ["efficiency_percent_per_w", "acceptance_nm", "peak_conversion"],
};

function sheetRequest(
  facts: LotFacts,
  { checked, decisions }: PredictionFacts,
  e: RankedEntry,
): SheetRequest {
  const { request, requirements } = checked;
  const wanted = new Set<Figure>([
    "operating_temperature_c",
    ...requirements.map((r) => r.figure),
    ...USUAL[request.process]!,
  ]);
  return {
    request: request.request,
    description: describe(checked),
    decision: e.decision,
    probability: e.probability,
    guide: e.guide,
    matched: decisions.find((d) => d.guide_id === e.guide)?.matched ?? false,
    limited_by: e.limited_by,
    requirements: requirements.map((r) => ({
      figure: r.figure,
      at_least: Number.isFinite(r.atLeast) ? r.atLeast : null,
      at_most: Number.isFinite(r.atMost) ? r.atMost : null,
    })),
    figures: Object.fromEntries(
      FIGURES.filter((f) => wanted.has(f) && e.figures[f].mean !== null).map((f) => [f, e.figures[f]]),
    ),
    other_temperatures_c: e.other_temperatures_c ?? [],
    oven_c: request.oven_c,
    budget: request.process === "pair-generation" ? budgetRows(e) : [],
    pump: pumpWords(facts, checked, e),
    remarks: e.remarks ?? [],
  };
}

/** What the pump should be. Powers are those inside the guide. */
function pumpWords({ platform }: LotFacts, { request }: CheckedRequest, e: RankedEntry): string[] {
  const out: string[] = [];
  const pump = e.figures.operating_pump_nm;
  const limit = platform.notes.pump_limit_mw;
  const marked = (mw: number) =>
    limit !== undefined && mw > limit ? ` — above the platform's ${num(limit)} mW` : "";
  if (request.process === "pair-generation") {
    if (pump.mean !== null) {
      out.push(
        `pump at ${num(pump.mean, 6)} nm${
          pump.u === null || pump.u === 0 ? "" : ` (u ${num(pump.u, 2)} nm)`
        }`,
      );
    }
    if (request.pump?.average_power_mw !== undefined) {
      out.push(
        `the request pumps with ${num(request.pump.average_power_mw)} mW${
          marked(request.pump.average_power_mw)
        }`,
      );
    }
    const most = e.figures.pump_power_at_g2_mw;
    if (most.mean !== null) {
      out.push(
        `heralded g2 stays in bounds up to ${num(most.mean)} mW (u ${num(most.u ?? 0, 2)} mW, an estimate)${
          marked(most.mean)
        }`,
      );
    }
  } else {
    for (
      const [wave, arm] of [["pump", request.pump], ["signal", request.signal], [
        "idler",
        request.idler,
      ]] as const
    ) {
      if (arm?.average_power_mw !== undefined) {
        out.push(
          `the request puts ${num(arm.average_power_mw)} mW into the ${wave}${marked(arm.average_power_mw)}`,
        );
      }
    }
  }
  return out;
}

/** Traits read on the die or its guides, walls left to the ledger. */
function readingsOf({ traits }: LotFacts, die: string): SheetReading[] {
  return traits.filter((t) => t.die_id === die && t.trait !== "walls_complete" && t.trait !== "coupling_db")
    .map((t) => ({
      trait: t.trait,
      unit: t.unit,
      wavelength_nm: t.wavelength_nm,
      polarisation: t.polarisation,
      value: t.value,
      u: t.u,
      method: t.method,
      readings: t.readings,
    })).sort((a, b) => a.trait < b.trait ? -1 : a.trait > b.trait ? 1 : compareIds(a.unit, b.unit));
}
