export { displayText } from "./display-text.ts";
export type { OnNotice } from "./file-notices.ts";
export type { GaugeFileCounts } from "./gauge-file-counts.ts";
export type { GaugeFileSpec, GaugeKind, GaugeLayout, GaugeUnit } from "./gauge-file-spec.ts";
export {
  type GaugeFileContents,
  type GaugeFileOptions,
  readGaugeFile,
  readGaugeFiles,
} from "./read-gauge-files.ts";
