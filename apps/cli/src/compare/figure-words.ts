/** Units as they end names of columns and keys, and as people read them. */
const UNITS: readonly (readonly [RegExp, string])[] = [
  [/[_ ]?(mm|Mm)$/, ", mm"],
  [/[_ ]?(db|Db)$/, ", dB"],
  [/[_ ]?(km2|Km2)$/, ", km²"],
  [/[_ ]?(percent|Percent)$/, ", %"],
];

/** What the last part of a score's path stands for. */
const PARTS: Readonly<Record<string, string>> = {
  value: "",
  n: ", number of pairs",
  dropped: ", pairs dropped",
  reason: ", why there is none",
  "gauges.low": ", lower limit over gauges",
  "gauges.high": ", upper limit over gauges",
  "timeBlocks.low": ", lower limit over time",
  "timeBlocks.high": ", upper limit over time",
};

/**
 * The name of a figure in words: of a column (`depth_mm`), a key of the headline (`districtMm`) or a place in
 * `scores.json` (`after.table.whole.continuous[biasRatio].value`).
 */
export function figureWords(figure: string): string {
  const score =
    /^(before|after\.table)\.whole\.(?:continuous|thresholds\[(\d+)\]\.scores)\[(\w+)\]\.(.+)$/.exec(figure);
  if (score !== null) {
    const [, side, threshold, name, part] = score;
    const of = side === "before" ? "radar" : "adjusted, cross-validated";
    const at = threshold === undefined ? "" : `, threshold ${Number(threshold) + 1}`;
    return `${of}: ${plainWords(name)}${at}${PARTS[part] ?? `, ${plainWords(part)}`}`;
  }
  for (const [pattern, unit] of UNITS) {
    if (pattern.test(figure)) return `${plainWords(figure.replace(pattern, ""))}${unit}`;
  }
  return plainWords(figure);
}

/** camelCase, snake_case and paths as words. */
function plainWords(name: string): string {
  return name
    .replace(/([a-z0-9])([A-Z])/g, (_, before: string, after: string) => `${before} ${after.toLowerCase()}`)
    .replace(/[_.]+/g, " ")
    .trim();
}
