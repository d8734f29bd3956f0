export type {
  GriddedFile,
  GriddedFormat,
  GriddedHeader,
  GriddedOptions,
  GriddedQuantity,
  GriddedScan,
  GridPlace,
} from "./gridded-file.ts";
export { GRIDDED_FORMATS, openGridded } from "./gridded-formats.ts";
export { readRasterGrid } from "./raster-grid.ts";
