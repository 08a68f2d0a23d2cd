// Pure: no I/O, no clock, no hidden randomness.
// Effective indices and effective areas of guides.
export {
  type AreaModel,
  type AreaTableRow,
  canonicalProcess,
  constantAreaModel,
  processName,
  tableAreaModel,
} from "./area_model.ts";
export { bulkIndexModel } from "./bulk_index.ts";
export {
  GEOMETRY_PARAMETERS,
  type GeometryParameter,
  type IndexModel,
  type IndexRange,
  type IndexSlice,
  mismatch,
  mismatchOverTemperature,
  type NominalGeometry,
  type PolarisationAxes,
} from "./index_model.ts";
export { propagationAxis } from "./propagation_axis.ts";
export { checkTableBounds, type TableSubstrate } from "./table_bounds.ts";
export { type IndexTableRow, tableIndexModel } from "./table_index.ts";
export * from "./solver/mod.ts";
