export { type CatchmentFields, readCatchments } from "./catchments.ts";
export { displayText } from "./display-text.ts";
export type { OnNotice } from "./file-notices.ts";
export type { GaugeFileCounts } from "./gauge-file-counts.ts";
export type { GaugeFileSpec, GaugeKind, GaugeLayout, GaugeUnit } from "./gauge-file-spec.ts";
export type { Guess } from "./guess.ts";
export {
  type GaugeFileContents,
  type GaugeFileOptions,
  type GaugeRowFaults,
  readGaugeFile,
  readGaugeFiles,
} from "./read-gauge-files.ts";
export type { ShapefileParts } from "./shapefile.ts";
export { type MapField, type MapGuess, sniffMap } from "./sniff-map.ts";
export type { ReadingsGuess } from "./sniff-readings.ts";
export type { StationsGuess } from "./sniff-stations.ts";
export { sniffTable, type TableGuess } from "./sniff-table.ts";
export {
  readStations,
  type StationColumns,
  type StationRow,
  type StationTableForm,
  stationsDuring,
} from "./stations.ts";
export { looksSwapped } from "./swapped.ts";
export { TEXT_ENCODINGS } from "./text-encoding.ts";
export { readZrPairs, type ZrPairTable } from "./zr-pairs-file.ts";
