// What is solved for a design, piece by piece: each piece can be solved on its own thread and kept on its own.
import {
  type CutOff,
  type DesignAreas,
  designKey,
  type DesignOutput,
  type PolarisationTable,
  solveAreas,
  solveOutput,
  solvePolarisation,
  type SolverDesign,
  solveWidths,
  type TableGrid,
  type WidthScan,
} from "../../models/guides/mod.ts";
import type { Polarisation, ThreeWaves } from "../../shared/vocabulary.ts";
import { sha256 } from "../json_file.ts";

/** One piece to be solved. Wavelengths and fibre diameters in m, temperature in °C. */
export type DesignTask =
  & { readonly design: SolverDesign }
  & (
    | { readonly kind: "modes"; readonly pol: Polarisation }
    | { readonly kind: "areas"; readonly waves: ThreeWaves }
    | { readonly kind: "widths"; readonly waves: ThreeWaves; readonly range_um: readonly [number, number] }
    | {
      readonly kind: "output";
      readonly pol: Polarisation;
      readonly lambda: number;
      readonly temperatureC: number;
      readonly fibres: readonly number[];
    }
  );

export type TaskResult =
  | PolarisationTable
  | { readonly reason: string }
  | DesignAreas
  | WidthScan
  | DesignOutput
  | CutOff;

/** Hash of everything that a piece's result depends on, the solver's version among it. */
export function taskKey(task: DesignTask, grid: TableGrid): string {
  return sha256(JSON.stringify([task.kind, designKey(task.design, grid), ownKey(task)]));
}

function ownKey(task: DesignTask): unknown[] {
  switch (task.kind) {
    case "modes":
      return [task.pol];
    case "areas":
      return wavesKey(task.waves);
    case "widths":
      return [...wavesKey(task.waves), ...task.range_um];
    case "output":
      return [task.pol, task.lambda, task.temperatureC, task.fibres];
  }
}

const wavesKey = (w: ThreeWaves) => [w.lambdaP, w.lambdaS, w.lambdaI, w.polP, w.polS, w.polI];

/** Solves one piece. @throws RangeError for impossible parameters, or where the crystal has no index */
export function runTask(task: DesignTask, grid: TableGrid): TaskResult {
  switch (task.kind) {
    case "modes":
      return solvePolarisation(task.design, task.pol, grid);
    case "areas":
      return solveAreas(task.design, task.waves, grid);
    case "widths":
      return solveWidths(task.design, task.waves, task.range_um, grid);
    case "output":
      return solveOutput(task.design, task.pol, task.lambda, task.temperatureC, task.fibres, grid);
  }
}
