import { counted } from "../ui/numbers.ts";
import type { CheckedGauge, CheckedRadar } from "./schema.ts";

/** Sound gauges with rain from which a ratio says something of the radar. House rule. */
const LEAST_GAUGES = 5;

/**
 * How far radar and gauges can be trusted together, in one plain sentence: the ratio over the gauges in use, how far
 * single gauges stray from it, and which radars are in doubt.
 */
export function trustSentence(gauges: readonly CheckedGauge[], radars: readonly CheckedRadar[]): string {
  const sound = gauges.filter(
    ({ verdict, trusted, gaugeMm, radarMm }) =>
      trusted && verdict !== "too little rain to judge" && (gaugeMm ?? 0) > 0 && (radarMm ?? 0) > 0,
  );
  if (gauges.length === 0)
    return "There is no gauge to hold the radar against: nothing here tells how far it can be trusted.";
  if (sound.length < LEAST_GAUGES)
    return `Only ${counted(sound.length, "gauge")} in use saw enough rain: too few to say how far the radar can be trusted.`;
  const sum = (of: (gauge: CheckedGauge) => number | null) =>
    sound.reduce((total, gauge) => total + (of(gauge) ?? 0), 0);
  const ratio = sum(({ radarMm }) => radarMm) / sum(({ gaugeMm }) => gaugeMm);
  const strays = sound
    .map(({ gaugeMm, radarMm }) => Math.abs((radarMm ?? 0) / (gaugeMm ?? 1) / ratio - 1))
    .sort((a, b) => a - b);
  const usual = strays[Math.min(strays.length - 1, Math.floor(0.8 * strays.length))] as number;
  const off = Math.round(100 * (ratio - 1));
  const level = off === 0 ? "as much as" : `${Math.abs(off)} % ${off > 0 ? "more" : "less"} than`;
  return `The radar shows ${level} ${counted(sound.length, "gauge")} in use, and four in five of them lie within ${Math.round(100 * usual)} % of that${doubtWords(radars)}.`;
}

/** Radars in doubt, those of one cause together. */
function doubtWords(radars: readonly CheckedRadar[]): string {
  const byCause = new Map<string, string[]>();
  for (const { radarId, verdict, cause } of radars) {
    if (verdict !== "leave out" && verdict !== "use with care") continue;
    const words = radarCauseWords(cause);
    byCause.set(words, [...(byCause.get(words) ?? []), radarId]);
  }
  const parts = [...byCause].map(([words, ids]) => `${ids.join(" and ")}${words === "" ? "" : `: ${words}`}`);
  return parts.length === 0 ? "" : `; doubt ${parts.join("; ")}`;
}

/** A cause beside the name of its radar, which need not be called one again. */
export function radarCauseWords(cause: { readonly words: string } | null | undefined): string {
  return cause?.words.replace(/^radar: /, "") ?? "";
}
