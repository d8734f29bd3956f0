export { isScanChunk, openScanChunks } from "./level2/chunks.ts";
export type { ScanFile, ScanFormat, ScanOptions } from "./scan-file.ts";
export { formatsReady, openScan, recogniseScan, SCAN_FORMATS } from "./scan-formats.ts";
