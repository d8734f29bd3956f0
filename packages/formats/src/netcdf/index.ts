export { type CfTimeUnits, cfTimeUnits } from "./cf-time.ts";
export { type NetcdfFile, numberAttribute, textAttribute, variablePath } from "./netcdf-file.ts";
export { isClassic, openNetcdf } from "./open-netcdf.ts";
