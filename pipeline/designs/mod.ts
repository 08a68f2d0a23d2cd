// Modes solved for a platform's designs, kept in the ledger and shared by the stages that need an index.
export { type ChangedModel, changedModels, widthScans } from "./changed_models.ts";
export { askedBy, type AskedWaves, designsFor, type DesignsFound } from "./designs.ts";
export type { ModeFacts } from "./mode_facts.ts";
export type { SolveSetting } from "./pieces.ts";
export {
  type AskedDesign,
  type DesignSensitivity,
  nominalGeometry,
  sensitivityOf,
  type SensitivityQuestion,
  type SensitivityRow,
} from "./sensitivity.ts";
