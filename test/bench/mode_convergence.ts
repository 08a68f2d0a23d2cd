// deno task convergence: how n_eff settles as the grid is refined, and how long a mode takes on one core.
import { refractiveIndex } from "../../models/materials/mod.ts";
import { type GridCells, rubidiumSection, solveGuide, titaniumSection } from "../../models/guides/mod.ts";

const stripe = { width: 7e-6, titanium: 0.1e-6, lateral: 4.5e-6, depth: 4.5e-6 };
const titanium = (wave: "ordinary" | "extraordinary", lambda: number) =>
  titaniumSection(stripe, wave, lambda, refractiveIndex("CLN", wave === "ordinary" ? "o" : "e", lambda, 25));
const rubidium = (lambda: number) =>
  rubidiumSection({
    substrate: refractiveIndex("KTP", "z", lambda, 25),
    cover: 1,
    step: 0.015,
    depth: 8e-6,
    width: 3e-6,
  });

const GUIDES = [
  ["titanium 7 µm, TM, 1550 nm", titanium("extraordinary", 1550e-9), 1550e-9],
  ["titanium 7 µm, TE, 1550 nm", titanium("ordinary", 1550e-9), 1550e-9],
  ["titanium 7 µm, TM, 775 nm", titanium("extraordinary", 775e-9), 775e-9],
  ["rubidium 3 µm, TM, 1582 nm", rubidium(1582e-9), 1582e-9],
  ["rubidium 3 µm, TM, 791 nm", rubidium(791e-9), 791e-9],
] as const;
const GRIDS: readonly GridCells[] = [
  { x: 32, y: 48 },
  { x: 48, y: 72 },
  { x: 64, y: 100 },
  { x: 100, y: 152 },
  { x: 160, y: 240 },
];

const memory = {};
for (const [name, section, lambda] of GUIDES) {
  const rows = GRIDS.map((cells) => {
    solveGuide(section, lambda, { cells, memory }); // once unmeasured: compilation is no part of the time
    const start = performance.now();
    const mode = solveGuide(section, lambda, { cells, memory });
    const time = performance.now() - start;
    if (mode.cutOff) throw new RangeError(`Cannot show convergence: ${mode.reason}`);
    return { cells, mode, time };
  });
  const best = rows[rows.length - 1]!.mode.nEff;
  const off = (n: number) => (1e6 * (n - best)).toFixed(3).padStart(9);
  console.log(`\n${name}: n_eff ${best.toFixed(8)}`);
  console.log("  cells x × y    n_eff − best, 1e-6:  4h        2h         h   h → 0   estimate      ms");
  for (const { cells, mode, time } of rows) {
    const grid = `${cells.x} × ${cells.y}`.padEnd(12);
    const estimate = (1e6 * mode.gridError).toFixed(3).padStart(9);
    console.log(
      `  ${grid}           ${mode.grids.map(off).join(" ")} ${off(mode.nEff)} ${estimate} ${
        time.toFixed(0).padStart(7)
      }`,
    );
  }
}
