/** What is drawn in each tile of eight by eight for a name, so that colour is never the only sign. */
export const TILES = [
  "M0 8L8 0M-2 2L2 -2M6 10L10 6",
  "M0 4h8",
  "M4 0v8",
  "M0 0L8 8M-2 6L2 10M6 -2L10 2",
  "M4 2v4M2 4h4",
  "M0 0h8v8",
  "M1 1h2v2h-2zM5 5h2v2h-2z",
];
