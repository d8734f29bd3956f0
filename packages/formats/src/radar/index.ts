export type { ScanFile, ScanFormat } from "./scan-file.ts";
export { formatsReady, openScan, recogniseScan, SCAN_FORMATS } from "./scan-formats.ts";
