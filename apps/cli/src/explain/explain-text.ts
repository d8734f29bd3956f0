import { areaText } from "./area-text.ts";
import { pointText } from "./point-text.ts";
import type { Explanation } from "./schema.ts";
import { wrapped } from "./text-words.ts";

/** An account for people: what the number is, how it was made scan by scan, and that it ends on what is stored. */
export function explainText(explanation: Explanation): string {
  return [
    ...explanation.points.map((point) => pointText(point, explanation)),
    ...explanation.catchments.map((area) => areaText(area, explanation)),
  ]
    .join("\n\n")
    .split("\n")
    .flatMap(wrapped)
    .join("\n");
}
