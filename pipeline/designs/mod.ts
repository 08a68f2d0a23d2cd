// Modes solved for a platform's designs, kept in the ledger and shared by the stages that need an index.
export { askedBy, type AskedWaves, designsFor, type DesignsFound, type SolveSetting } from "./designs.ts";
export {
  type AskedDesign,
  type DesignSensitivity,
  type ModeFacts,
  nominalGeometry,
  sensitivityOf,
  type SensitivityQuestion,
  type SensitivityRow,
} from "./sensitivity.ts";
