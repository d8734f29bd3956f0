export {
  type AttributeValue,
  type DatasetShape,
  type ElementType,
  type Hdf5File,
  MAX_ELEMENTS,
  openHdf5,
  readHead,
} from "./file.ts";
export { hdf5Ready } from "./library.ts";
export { HEAD_BYTES, signatureOffset } from "./superblock.ts";
