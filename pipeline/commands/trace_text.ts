import { numberText, outputWidth, visibleText, wrap } from "../console/mod.ts";
import type { Basis } from "../../shared/vocabulary.ts";
import type {
  Trace,
  TracedReading,
  TracedShares,
  TracedStep,
  TracedTrait,
  TracedTraitRow,
} from "../query/trace_types.ts";

interface Node {
  readonly text: string;
  readonly below: readonly Node[];
}

/** So many trait rows of one trait, and readings of one row, are shown; a lot's mean may rest on thousands. */
const SHOWN = 6;

/** Columns of a reading that a person does not need to find it again; CSV and JSON have them. */
const LEFT_OUT = ["measured_at", "instrument"];

/** A trace as an indented tree for people. */
export function traceText(trace: Trace, width = outputWidth()): string {
  const { platform, design } = trace;
  const origin = [
    `predicted by ${trace.run} (model ${trace.model}) from ${trace.runs.reduce}, ${
      trace.runs.ingest.join(", ")
    }`,
    `request ${trace.request}, sha256 ${short(trace.request_sha256)}; ` +
    `platform ${platform.platform}, sha256 ${short(platform.sha256)}`,
  ];
  const roots: Node[] = [
    leafOf(`${trace.figure} of ${trace.guide} for ${trace.request}: ${figureText(trace)}`, [
      ...trace.unavailable === undefined ? [] : [leafOf(`the die can't be shipped: ${trace.unavailable}`)],
      ...origin.map((text) => leafOf(text)),
    ]),
    leafOf(
      trace.traits.length === 0 ? "rests on the request alone" : "rests on",
      trace.traits.map((t) => traitNode(t, trace.guide)),
    ),
    ...platform.defaults.length === 0 ? [] : [leafOf(
      `defaults of platform ${platform.platform}`,
      platform.defaults.map((d) => leafOf(`${d.default}${where(d)}: ${withU(d)}, for ${d.roles.join(", ")}`)),
    )],
    leafOf("the guide as designed", [leafOf(
      `${
        at(design)
      }  width ${design.width_um} µm, period ${design.period_um} µm, length ${design.length_mm} mm, ` +
        `poled ${design.poled_length_mm} mm from ${design.poled_from_mm} mm`,
    )]),
    leafOf(
      `steps of wafer ${trace.wafer.wafer}` +
        (trace.wafer.substrate_batch === null ? "" : `, substrate batch ${trace.wafer.substrate_batch}`),
      trace.steps.length === 0 ? [leafOf("none recorded")] : trace.steps.map((s) => leafOf(stepText(s))),
    ),
    leafOf(
      `coatings of die ${trace.die}`,
      trace.coatings.length === 0 ? [leafOf("none recorded: bare facets")] : trace.coatings.map((c) =>
        leafOf(
          `${c.facet} facet, run ${c.coating_run}${c.counts ? "" : " (coated again later: does not count)"}`,
        )
      ),
    ),
    leafOf("files", filesOf(trace).map(([name, sha]) => leafOf(name, [leafOf(sha)]))),
  ];
  return roots.map((root) => drawn(root, width)).join("\n");
}

const leafOf = (text: string, below: readonly Node[] = []): Node => ({ text, below });
const short = (sha256: string): string => `${sha256.slice(0, 12)}…`;
const at = (s: { file_name: string; source_line: number }): string => `${s.file_name}:${s.source_line}`;

function figureText({ mean, u, lo, hi, probability, basis, reason }: Trace): string {
  if (mean === null) return `none: ${reason ?? "no reason stated"}`;
  return [
    withU({ value: mean, u }),
    ...lo === null || hi === null
      ? []
      : [`95 % of the draws within ${numberText(lo, 4)} … ${numberText(hi, 4)}`],
    ...probability === null ? [] : [`meets its requirement with probability ${numberText(probability, 3)}`],
    `basis ${basis}`,
  ].join("; ");
}

const withU = ({ value, u }: { value: number | null; u: number | null }): string =>
  value === null
    ? "no value"
    : u === null
    ? numberText(value, 6)
    : `${numberText(value, 6)} ± ${numberText(u, 3)}`;

const where = (
  t: {
    readonly wavelength_nm: number | null;
    readonly polarisation: string | null;
    readonly process?: string | null;
  },
): string =>
  [
    t.wavelength_nm === null ? "" : ` at ${numberText(t.wavelength_nm, 7)} nm`,
    t.polarisation === null ? "" : ` ${t.polarisation}`,
    t.process === undefined || t.process === null ? "" : ` ${t.process}`,
  ].join("");

const BASIS: Readonly<Record<Basis, string>> = {
  measured: "measured on",
  die: "from die",
  wafer: "from wafer",
  lot: "from lot",
  platform: "from platform",
};

function traitNode(t: TracedTrait, guide: string): Node {
  const value = t.value === null ? "" : `: ${withU(t)}`;
  const basis = t.basis === "measured" && t.from === guide ? "measured" : `${BASIS[t.basis]} ${t.from}`;
  const far = t.distance === null || t.distance === 0
    ? ""
    : `; readings up to ${numberText(100 * Math.abs(t.distance), 2)} % away in wavelength`;
  const remark = t.note === null ? "" : `; ${t.note}`;
  return leafOf(`${t.role}  ${t.trait}${where(t)}${value}, ${basis}${far}${remark}`, [
    ...t.shares === null ? [] : [leafOf(sharesText(t.shares))],
    ...some(t.measured, (row) => rowNode(row, guide), "trait rows"),
    ...some(t.readings, (r) => leafOf(readingText(r)), "readings"),
  ]);
}

/** What the value is made of, largest part first; parts below half a per cent are not worth a word. */
export function sharesText(shares: TracedShares): string {
  const parts = [
    ["its own readings", shares.own],
    ["readings of its die", shares.die],
    ["readings of its wafer", shares.wafer],
    ["readings of its lot", shares.lot],
    ["readings of other lots", shares.other_lots],
    ["the platform's default", shares.platform],
  ] as const;
  const counted = parts.filter(([, share]) => share >= 0.005).sort((a, b) => b[1] - a[1]);
  return `made of ${counted.map(([name, share]) => `${name} ${(100 * share).toFixed(0)} %`).join(", ")}`;
}

function rowNode(row: TracedTraitRow, guide: string): Node {
  const u = row.u_from === "platform" ? ", u by the platform's default" : "";
  const unit = row.unit === guide ? "" : `${row.unit}: `;
  const detail = row.detail === null ? "" : `; ${row.detail}`;
  const text = row.trait === "walls_complete"
    ? `${unit}${row.method}, complete${detail}`
    : `${unit}${row.method}${where(row)}: ${withU(row)}${u}${detail}`;
  return leafOf(text, some(row.readings, (r) => leafOf(readingText(r, row)), "readings"));
}

/** A reading; what its trait row says already is not said again. */
function readingText(r: TracedReading, row?: TracedTraitRow): string {
  if (r.source_line_last !== undefined) {
    return `${at(r)}–${r.source_line_last}  ${r.rows} rows, ${r.quantity} ${
      numberText(r.value, 7)
    } in the first, ` +
      `${numberText(r.value_last!, 7)} in the last`;
  }
  const said = (name: string, cell: unknown) =>
    LEFT_OUT.includes(name) || (row as unknown as Record<string, unknown> | undefined)?.[name] === cell;
  const rest = Object.entries(r.row).filter(([name, cell]) => !said(name, cell)).map(([name, cell]) =>
    `${name} ${typeof cell === "number" ? numberText(cell, 7) : cell}`
  );
  const stated = r.u === null ? "" : ` (u ${numberText(r.u, 3)})`;
  return `${at(r)}  ${r.quantity} ${numberText(r.value, 7)}${stated}` +
    (rest.length === 0 ? "" : `, ${rest.join(", ")}`);
}

function some<T>(items: readonly T[], node: (item: T) => Node, what: string): Node[] {
  const shown = items.slice(0, SHOWN).map(node);
  const more = items.length - shown.length;
  return more === 0
    ? shown
    : [...shown, leafOf(`… and ${more} more ${what}: --format csv or json lists them all`)];
}

function stepText(s: TracedStep): string {
  const settings = Object.entries(s.settings).map(([name, value]) =>
    `${name} ${typeof value === "object" ? JSON.stringify(value) : value}`
  );
  return [
    `${s.order}. ${s.step}`,
    ...s.tool === null ? [] : [`tool ${s.tool}`],
    ...s.recipe === null ? [] : [`recipe ${s.recipe}`],
    ...settings,
    ...s.finished === null ? [] : [`finished ${s.finished}`],
  ].join(", ");
}

/** Every file that the trace names, with its whole sha256. */
function filesOf(trace: Trace): [string, string][] {
  const sources = [
    trace.design,
    ...trace.steps,
    ...trace.coatings,
    ...trace.traits.flatMap((t) => [...t.measured.flatMap((row) => row.readings), ...t.readings]),
  ];
  const files = new Map(
    sources.map((s) => [`${s.file_name} ${s.source_file}`, [s.file_name, s.source_file] as [string, string]]),
  );
  return [...files.values()].sort(([a], [b]) => a < b ? -1 : 1);
}

/** A node and what is below it, with lines that join them; long texts go on under their own beginning. */
function drawn(node: Node, width: number): string {
  const lines: string[] = [];
  const draw = ({ text, below }: Node, first: string, rest: string) => {
    const bar = below.length > 0 ? "│  " : "   ";
    const [head, ...more] = wrap(visibleText(text), width - rest.length - bar.length);
    lines.push(first + head, ...more.map((line) => rest + bar + line));
    below.forEach((child, k) => {
      const last = k === below.length - 1;
      draw(child, `${rest}${last ? "└─ " : "├─ "}`, `${rest}${last ? "   " : "│  "}`);
    });
  };
  draw(node, "", "");
  return lines.join("\n") + "\n";
}
