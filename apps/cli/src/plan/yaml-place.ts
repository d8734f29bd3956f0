import { type Document, isMap, isNode, isPair, isScalar, isSeq, type LineCounter } from "yaml";

/** A path into a plan: keys of maps and indices of lists. */
export type PlanPath = readonly (string | number)[];

/** A plan path as people read it: `radars[0].offsetDb`. */
export function pathText(path: PlanPath): string {
  let text = "";
  for (const step of path) {
    if (typeof step === "number") text += `[${step}]`;
    else text += text === "" ? step : `.${step}`;
  }
  return text === "" ? "top level" : text;
}

/**
 * Line on which a path of the plan stands, counted from 1.
 *
 * A key's own line is given, not its value's; where the path leads to nothing (a key that is missing)
 * the nearest parent that exists answers.
 */
export function lineOfPath(document: Document, counter: LineCounter, path: PlanPath): number {
  let node: unknown = document.contents;
  let offset = startOf(node) ?? 0;
  for (const step of path) {
    let next: unknown;
    if (isMap(node)) {
      const pair = node.items.find((item) => isScalar(item.key) && String(item.key.value) === String(step));
      if (pair === undefined) break;
      offset = startOf(pair.key) ?? offset;
      next = pair.value;
    } else if (isSeq(node)) {
      next = node.items[Number(step)];
      if (isPair(next)) next = next.value;
      offset = startOf(next) ?? offset;
    }
    if (!isNode(next)) break;
    node = next;
  }
  return Math.max(1, counter.linePos(offset).line);
}

function startOf(node: unknown): number | undefined {
  return isNode(node) && node.range ? node.range[0] : undefined;
}
