export { type CsvColumn, type CsvNumberColumn, type CsvTextColumn, csvText, writeCsv } from "./csv.ts";
export {
  type GeoJsonFeature,
  type GeoJsonGeometry,
  type Isohyet,
  type LonLat,
  writeGeoJson,
  writeIsohyets,
} from "./geojson.ts";
export { type GeoTiffSpec, writeGeoTiff } from "./geotiff.ts";
export type { AttributeValue } from "./grid-mapping.ts";
export { finiteOrNull, type JsonValue, toJson, writeJson } from "./json.ts";
export type { MapReference } from "./map-reference.ts";
export { createTotalsFile, type TotalsFile, type TotalsSpec } from "./netcdf.ts";
export { type ParquetColumn, writeParquet } from "./parquet.ts";
export { openTotalsLayers, readTotals, type TotalsLayers } from "./read-totals.ts";
export { type ArchiveEntry, writeTarGz } from "./tar.ts";
export { sha256OfFile, writeText } from "./text.ts";
export { TOTALS_VARIABLES, type TotalsVariable } from "./totals-variables.ts";
