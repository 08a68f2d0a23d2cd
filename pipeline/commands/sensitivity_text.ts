import { type Cell, type TableColumn, wrap } from "../console/mod.ts";
import type { Platform } from "../../shared/schemas/platform.ts";
import type { Process, ThreeWaves } from "../../shared/vocabulary.ts";
import { toNm } from "../../shared/units.ts";
import type { DesignSensitivity, SensitivityRow } from "../designs/mod.ts";
import type { LoadedRequest } from "../requests.ts";

/** Names of what may be off, as people say them. */
const NAMES: Readonly<Record<string, readonly [name: string, unit: string]>> = {
  width_um: ["width", "µm"],
  film_thickness_nm: ["film thickness", "nm"],
  etch_depth_nm: ["etch depth", "nm"],
  titanium_nm: ["titanium", "nm"],
  diffusion_lateral_um: ["diffusion, lateral", "µm"],
  diffusion_depth_um: ["diffusion, depth", "µm"],
  diffusion_hours: ["diffusion time", "h"],
  diffusion_temperature_c: ["diffusion temp.", "°C"],
  exchange_depth_um: ["exchange depth", "µm"],
  index_step: ["index step", ""],
  temperature_c: ["temperature", "°C"],
};

const WIDTH = 80;

/** Sensitivities of designs for people. */
export function sensitivityText(
  platform: Platform,
  asked: {
    readonly lot: string | null;
    readonly request: LoadedRequest | null;
    readonly waves: ThreeWaves;
    readonly process: Process;
  },
  designs: readonly DesignSensitivity[],
  table: (columns: readonly TableColumn[], rows: readonly (readonly Cell[])[]) => string,
): string {
  const { waves, lot, request } = asked;
  const nm = (lambda: number) => Number(toNm(lambda).toFixed(2));
  const of = lot === null ? `platform ${platform.platform}` : `lot ${lot} (${platform.platform})`;
  const heading = `${request === null ? "" : `${request.name}: `}${waves.polP}>${waves.polS}+${waves.polI}, ${
    nm(waves.lambdaP)
  } = ${nm(waves.lambdaS)} + ${nm(waves.lambdaI)} nm, on ${of}`;
  const parts = [...wrap(heading, WIDTH)];
  for (const design of designs) parts.push("", ...designText(design, asked.process, request, table));
  parts.push(
    "",
    ...wrap(
      `${
        SCANNED[asked.process]
      }: move of the centre at fixed temperature (–: no wavelength near makes up for it); oven: ` +
        `what it has to follow by at fixed wavelength, to first order; efficiency: change of its peak${
          designs.some((d) => d.purity !== null)
            ? "; purity: of an ideal grating, the oven following (for a temperature, the period)"
            : ""
        }.`,
      WIDTH,
    ),
  );
  return parts.join("\n");
}

const SCANNED: Readonly<Record<Process, string>> = {
  "second-harmonic": "fundamental",
  "pair-generation": "pump",
  "sum-frequency": "idler",
  "difference-frequency": "signal",
};

function designText(
  design: DesignSensitivity,
  process: Process,
  request: LoadedRequest | null,
  table: (columns: readonly TableColumn[], rows: readonly (readonly Cell[])[]) => string,
): string[] {
  const width = design.width_um === null ? "Bulk crystal" : `Width ${design.width_um} µm`;
  if (design.reason !== null) return wrap(`${width}: ${design.reason}`, WIDTH);
  const purity = design.purity === null ? "" : `, purity ${design.purity.toFixed(3)}`;
  const at = `${width}, period ${design.period_um.toFixed(3)} µm, ${
    design.temperature_c.toFixed(1)
  } °C${purity}${design.matched ? "" : ` (no period of the lot matches within the oven: its middle)`}`;
  const columns: TableColumn[] = [
    { title: "error" },
    { title: "by", align: "right" },
    { title: "Δβ, 1/m", align: "right" },
    { title: `${SCANNED[process]}, nm`, align: "right" },
    { title: "oven, °C", align: "right" },
    { title: "efficiency", align: "right" },
    ...(design.purity === null ? [] : [{ title: "purity", align: "right" as const }]),
  ];
  const lines = [
    ...wrap(at, WIDTH),
    table(columns, design.rows.map((r) => rowCells(r, design.purity !== null))),
  ];
  lines.push(...nonCriticalLines(design));
  for (const w of design.waves) {
    const modes = w.modes === null
      ? ""
      : `; ${w.modes} ${w.modes === 1 ? "mode" : "modes"}, ${w.mfd_x_um!.toFixed(1)} × ${
        w.mfd_y_um!.toFixed(1)
      } µm`;
    const coupling = w.coupling_solved === null
      ? ""
      : `; fibre ${w.coupling_solved.toFixed(3)} (solved field), ${
        w.coupling_gaussian!.toFixed(3)
      } (Gaussian)`;
    lines.push(...wrap(
      `${w.wave} ${w.wavelength_nm.toFixed(1)} nm ${w.polarisation}: n_eff ${
        w.n_eff.toFixed(5)
      }, group index ${w.group_index.toFixed(4)}${modes}${coupling}`,
      WIDTH,
    ));
  }
  for (const remark of design.remarks) lines.push(...wrap(`remark: ${remark}`, WIDTH));
  if (request !== null && design.waves.some((w) => w.coupling_solved !== null)) {
    lines.push(
      ...wrap(
        "Predictions use the Gaussian estimate of the mode sizes read or, without a reading, of the platform's defaults.",
        WIDTH,
      ),
    );
  }
  return lines;
}

/** Where the width does not count to first order, and what is left of an error there. */
function nonCriticalLines(
  { non_critical_widths, widths_searched_um, widths_cut_off }: DesignSensitivity,
): string[] {
  if (widths_searched_um === null) return [];
  const [low, high] = widths_searched_um.map((w) => short(Number(w.toFixed(2))));
  const narrower = widths_cut_off === null ? "" : ` ${widths_cut_off}.`;
  if (non_critical_widths.length === 0) {
    return wrap(`No width from ${low} to ${high} µm is non-critical (∂Δβ/∂width = 0).${narrower}`, WIDTH);
  }
  const found = non_critical_widths.map(({ width_um, by, mismatch_per_m, temperature_c }) =>
    `${width_um.toFixed(2)} µm, where ±${by} µm leaves ${signed(mismatch_per_m)} 1/m to second order${
      temperature_c === null ? "" : ` (oven ${signed(temperature_c)} °C)`
    }`
  );
  return wrap(
    `Non-critical width (∂Δβ/∂width = 0): ${
      found.join("; ")
    }; looked for from ${low} to ${high} µm.${narrower}`,
    WIDTH,
  );
}

function rowCells(r: SensitivityRow, withPurity: boolean): Cell[] {
  const [name, unit] = NAMES[r.parameter] ?? [r.parameter, ""];
  return [
    name,
    `${signed(r.by)} ${unit}`.trimEnd(),
    signed(r.mismatch_per_m),
    r.centre_nm === null ? "–" : signed(r.centre_nm),
    r.temperature_c === null ? "" : signed(r.temperature_c),
    r.efficiency_percent === null ? "" : `${signed(r.efficiency_percent, 2, 2)} %`,
    ...(withPurity ? [r.purity === null ? "" : signed(r.purity, 2, 5)] : []),
  ];
}

/** With its sign, to so many digits but no more decimals than told, plainly written; 0 has no sign. */
function signed(x: number, digits = 3, decimals = 20): string {
  const rounded = Number(Number(x.toPrecision(digits)).toFixed(decimals));
  if (rounded === 0) return "0";
  return `${rounded < 0 ? "−" : "+"}${Math.abs(rounded)}`;
}
const short = (x: number): string => String(Number(x.toFixed(3)));
