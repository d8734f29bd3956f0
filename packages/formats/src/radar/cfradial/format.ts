import { signatureOffset } from "../../hdf5/index.ts";
import { isClassic } from "../../netcdf/index.ts";
import type { ScanFormat } from "../scan-file.ts";
import { openCfradial1 } from "./cfradial1-file.ts";
import { openCfradial2 } from "./cfradial2-file.ts";

/** CfRadial 1, one or several sweeps in a file, NetCDF-3 or NetCDF-4. */
export const cfradial1Format: ScanFormat = {
  name: "CfRadial 1",
  recognise: (head) => signatureOffset(head) !== undefined || isClassic(head),
  open: openCfradial1,
};

/** CfRadial 2, as WMO FM 301 has it. */
export const cfradial2Format: ScanFormat = {
  name: "CfRadial 2",
  recognise: (head) => signatureOffset(head) !== undefined,
  open: openCfradial2,
};
