/** A script of the page and all it imports, as one string: made by `scripts/page-script.mjs` while building. */
declare module "*?bundled" {
  const script: string;
  export default script;
}
