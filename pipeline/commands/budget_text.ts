import { type Figure } from "../../shared/schemas/figures.ts";
import { budgetBasis } from "../budget_basis.ts";
import { textTable, wrap } from "../console/mod.ts";
import type { RankedEntry, RankedFigure } from "../query/rank.ts";
import type { LoadedRequest } from "../requests.ts";

const FACTORS = ["survival", "facet", "coupling", "filter", "detector"] as const;

/** What the first die of a ranking does, in a few lines: operating point, and the heralding budget of a pair source. */
export function budgetText(best: RankedEntry, { request }: LoadedRequest): string {
  const { figures: f } = best;
  const lines = [`First: ${best.guide}, ${best.decision}, probability ${best.probability.toFixed(3)}`];
  const temperature = f.operating_temperature_c;
  if (temperature.mean !== null) {
    const others = best.other_temperatures_c === undefined
      ? ""
      : `; also at ${best.other_temperatures_c.join(", ")} °C`;
    lines.push(
      f.operating_pump_nm.mean === null
        ? `Nothing matches in the oven; what follows is at the nearest temperature, ${
          temperature.mean.toFixed(1)
        } °C`
        : wrap(`Oven at ${withU(temperature, 1)} °C (${temperature.basis})${others}${partly(best)}`, 80).join(
          "\n",
        ),
    );
  }
  if (request.process !== "pair-generation") return lines.join("\n");
  const arms = ["signal", "idler"] as const;
  const rows = [
    ...[...FACTORS, "heralding"].map((factor) => [
      factor,
      ...arms.flatMap((arm) => cells(factor, f[`${factor}_${arm}` as Figure])),
    ]),
  ];
  const columns = [
    { title: "budget" },
    { title: "signal", align: "right" as const },
    { title: "basis" },
    { title: "idler", align: "right" as const },
    { title: "basis" },
  ];
  lines.push(textTable(columns, rows, { width: 80 }).trimEnd());
  if (best.windows_nm !== undefined && f.purity.mean !== null) {
    const window = (w: readonly number[]) => `${w[0]!.toFixed(1)}–${w[1]!.toFixed(1)} nm`;
    lines.push(
      `Purity in the windows ${window(best.windows_nm.signal)} (signal) and ${
        window(best.windows_nm.idler)
      } (idler)`,
    );
  }
  lines.push(
    "Powers are estimates. Laser work follows IEC 60825-1 and the laboratory's",
    "laser-safety officer.",
  );
  return lines.join("\n");
}

/** Draws without a match have no temperature: what is told then holds for the others only. */
const partly = ({ matched }: RankedEntry): string =>
  matched > 0.995 ? "" : `, in the ${Math.round(100 * matched)} % of the draws that match in the oven`;

const cells = (factor: string, figure: RankedFigure): string[] =>
  figure.mean === null ? ["–", figure.reason ?? ""] : [withU(figure, 3), budgetBasis(factor, figure)];

/** Value with its standard uncertainty. */
function withU({ mean, u }: RankedFigure, decimals: number): string {
  return u === null || u < 0.5 * 10 ** -decimals
    ? mean!.toFixed(decimals)
    : `${mean!.toFixed(decimals)} ± ${u.toFixed(decimals)}`;
}
