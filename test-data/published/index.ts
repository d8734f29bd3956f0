export {
  allCheckValues,
  BOOKS,
  type Book,
  type CheckValue,
  checkValue,
  checkValues,
  inputNumber,
  inputNumbers,
  isBinding,
  type Json,
} from "./entries.ts";
export { ATTENUATION_CORRECTION_ENTRIES, CORE_NOT_APPLICABLE, GEODESIC_ENTRIES } from "./not-applicable.ts";
export {
  type Adapter,
  fits,
  type IdPattern,
  type NotApplicable,
  type ReferenceSuite,
  runReferenceSuite,
} from "./suite.ts";
export { differences, withinTolerance } from "./tolerance.ts";
