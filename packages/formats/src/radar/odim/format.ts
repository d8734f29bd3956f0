import { signatureOffset } from "../../hdf5/index.ts";
import type { ScanFormat } from "../scan-file.ts";
import { openOdim } from "./odim-file.ts";

/** ODIM_H5 2.0 to 2.4, objects PVOL and SCAN. */
export const odimFormat: ScanFormat = {
  name: "ODIM_H5",
  recognise: (head) => signatureOffset(head) !== undefined,
  open: openOdim,
};
