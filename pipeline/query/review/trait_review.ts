import {
  edgeEffect,
  neighbourSimilarity,
  nestedVariance,
  type SiteValue,
  waferTrend,
} from "../../../models/decision/wafer/mod.ts";
import { mm } from "../../../shared/units.ts";
import type { TraitReview, TrendReview } from "../../review_types.ts";
import type { TraitRow } from "../../traits/trait_row.ts";
import type { LotFacts } from "../flag/facts.ts";
import { type Series, seriesOf, seriesWords, unitOf } from "../flag/series.ts";
import { num } from "../flag/types.ts";

/** Traits shown on wafer maps. */
const SHOWN = [
  "loss_db_cm",
  "duty",
  "duty_sd",
  "merged",
  "width_error_um",
  "film_thickness_nm",
  "etch_depth_nm",
  "titanium_nm",
  "mfd_x_um",
  "mfd_y_um",
  "mismatch_offset_per_m",
];

/** Dies from this share of the outermost die's radius on count as the edge (common practice, no source). */
const EDGE_FROM = 0.75;
/** Dies that are enough for a trend wherever they stand: fewer are for some places, which a sentence need not teach. */
const ALWAYS_ENOUGH = 6;
/** A trend is told as one below this p. */
const TOLD = 0.01;

/** Every trait of a lot by die, with where it varies. */
export function traitReviews(facts: LotFacts): TraitReview[] {
  const places = placesOf(facts);
  return seriesOf(facts.traits, SHOWN, facts.platform).map((series) => ({
    key: series.key,
    words: seriesWords(series),
    unit: unitOf(series.trait).trim(),
    dies: series.dies.map((d) => ({ die: d.unit, wafer: d.wafer, value: d.value, u: d.u, rows: d.rows })),
    trends: trendsOf(series, places),
    shares: sharesOf(series, facts.traits),
  }));
}

type Place = { readonly x: number; readonly y: number };

/** Die → centre in m. */
function placesOf({ design }: LotFacts): Map<string, Place> {
  return new Map([...design.guidesOfDie].map(([die, [g]]) => [die, { x: mm(g!.x_mm), y: mm(g!.y_mm) }]));
}

function trendsOf(series: Series, places: ReadonlyMap<string, Place>): TrendReview[] {
  const wafers = [...new Set(series.dies.map((d) => d.wafer))];
  return wafers.map((wafer) => {
    const sites = series.dies.filter((d) => d.wafer === wafer && places.has(d.unit)).map((d): SiteValue => ({
      ...places.get(d.unit)!,
      value: d.value,
    }));
    const trend = waferTrend(sites);
    const p = (test: typeof trend.linear) => "refused" in test ? null : test.p;
    const radius = sites.reduce((r, s) => Math.max(r, Math.hypot(s.x, s.y)), 0);
    const edge = radius > 0 ? edgeEffect(sites, EDGE_FROM * radius) : { refused: "one place" };
    const reach = 1.1 * pitchOf([...places.values()]);
    const alike = reach > 0 ? neighbourSimilarity(sites, reach, "trend") : { refused: "one place" };
    const told = {
      wafer,
      dies: sites.length,
      slope_p: p(trend.linear),
      radial_p: p(trend.radial),
      across_wafer: trend.surface?.acrossWafer ?? null,
      centre_to_edge: trend.surface?.centreToEdge ?? null,
      edge_difference: "refused" in edge ? null : edge.difference,
      edge_p: "refused" in edge ? null : edge.p,
      neighbours_i: "refused" in alike ? null : alike.i,
      neighbours_p: "refused" in alike ? null : alike.p,
    };
    return { ...told, sentence: sentenceOf(told, unitOf(series.trait), trend.any) };
  });
}

/** Distance of the nearest two dies, m; 0 when there is one place. */
function pitchOf(places: readonly Place[]): number {
  let least = Infinity;
  for (const [k, a] of places.entries()) {
    for (const b of places.slice(k + 1)) {
      const d = Math.hypot(a.x - b.x, a.y - b.y);
      if (d > 0 && d < least) least = d;
    }
    if (k > 200) break; // a mask repeats: the first dies have the pitch of all
  }
  return Number.isFinite(least) ? least : 0;
}

function sentenceOf(
  t: Omit<TrendReview, "sentence">,
  unit: string,
  any: { readonly refused: string } | { readonly p: number },
): string {
  if ("refused" in any) {
    return t.dies < ALWAYS_ENOUGH
      ? `no trend can be told from ${t.dies === 1 ? "1 die" : `${t.dies} dies`} read`
      : `no trend can be told: ${any.refused}`;
  }
  const found = [
    t.slope_p !== null && t.slope_p < TOLD
      ? `a slope of ${num(t.across_wafer!)}${unit} from side to side (p = ${num(t.slope_p, 2)})`
      : "",
    t.radial_p !== null && t.radial_p < TOLD
      ? `${num(t.centre_to_edge!)}${unit} from centre to edge (p = ${num(t.radial_p, 2)})`
      : "",
    t.edge_p !== null && t.edge_p < TOLD
      ? `edge dies differ by ${num(t.edge_difference!)}${unit} (p = ${num(t.edge_p, 2)})`
      : "",
    t.neighbours_p !== null && t.neighbours_p < TOLD
      ? `neighbouring dies are ${t.neighbours_i! > 0 ? "alike" : "unlike"} beyond that (p = ${
        num(t.neighbours_p, 2)
      })`
      : "",
  ].filter((s) => s !== "");
  return found.length === 0 ? `no trend seen over ${t.dies} dies` : found.join("; ");
}

/** How much of the spread lies between wafers, dies of a wafer, guides of a die; what is between two levels with one unit each is told as one. */
function sharesOf(series: Series, rows: readonly TraitRow[]): TraitReview["shares"] {
  const own = rows.filter((r) =>
    r.trait === series.trait && r.guide_id !== null && r.polarisation === series.polarisation &&
    r.process === series.process &&
    (r.wavelength_nm === null) === (series.wavelength_nm === null) &&
    (r.wavelength_nm === null || Math.round(r.wavelength_nm) === Math.round(series.wavelength_nm!))
  );
  if (own.length < 6) return [];
  const reading = own.reduce((sum, r) => sum + r.u * r.u, 0) / own.length;
  const result = nestedVariance(
    own.map((r) => ({ value: r.value, groups: [r.wafer!, r.die_id!] })),
    ["wafer", "die", "guide"],
    reading,
  );
  if ("refused" in result) return [];
  return [
    ...result.levels.map((l) => ({
      level: l.names.map((n) => `between ${n}s`).join(" and ") || "left",
      share: l.share,
      sd: Math.sqrt(l.variance),
    })),
    ...(result.reading === null
      ? []
      : [{ level: "readings", share: result.reading.share, sd: Math.sqrt(result.reading.variance) }]),
  ].filter((s) => Number.isFinite(s.share));
}
