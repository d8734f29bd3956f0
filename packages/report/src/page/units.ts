import { inInches, printedInches } from "./depths.ts";
import type { Choice, Store } from "./store.ts";

/** Parts of the page that stand as they are: what they say is no depth, or is drawn anew in the unit. */
const LEFT_ALONE =
  "script, style, #provenance, #glossary, .map-stage, .live-legend, .place-panel, .page-tools, .time-bar, .readout";
/** Numbers of charts that are depths without saying so. */
const CHART_DEPTHS = "text.depth";

/**
 * Turns the depths that stand on the page from millimetres to inches and back.
 *
 * What is turned is what is printed: a number before "mm", a cell of a column whose head says mm, a mark of a chart's
 * depth axis. Back in millimetres each text is the one that the page came with.
 */
export function unitSwitch(store: Store): void {
  const originals = new Map<Text, string>();
  const turn = (node: Text, text: string) => {
    if (text === node.data) return;
    originals.set(node, node.data);
    node.data = text;
  };
  const toInches = () => {
    const cells = [...document.querySelectorAll<HTMLTableElement>("main table")]
      .filter((table) => table.closest(LEFT_ALONE) === null)
      .flatMap(depthCells);
    const bare = new Set<Text>([
      ...cells.flatMap(textsOf),
      ...[...document.querySelectorAll(CHART_DEPTHS)].flatMap(textsOf),
    ]);
    for (const node of bare) turn(node, bareInches(node.data));
    const walker = document.createTreeWalker(document.body, NodeFilter.SHOW_TEXT);
    for (let node = walker.nextNode(); node !== null; node = walker.nextNode()) {
      const text = node as Text;
      if (bare.has(text) || !/\bmm\b/.test(text.data) || text.parentElement?.closest(LEFT_ALONE)) continue;
      turn(text, inInches(text.data));
    }
  };
  store.on(["unit"], ({ unit }: Choice) => {
    for (const [node, text] of originals) node.data = text;
    originals.clear();
    if (unit === "in") toInches();
  });
}

/** Cells of the columns whose head ends in mm. */
function depthCells(table: HTMLTableElement): HTMLTableCellElement[] {
  const heads = [...(table.tHead?.rows[0]?.cells ?? [])];
  const inCaption = /, mm\b|^[^.]*: mm /.test(table.caption?.textContent ?? "");
  const columns = heads.flatMap((head, column) => {
    const words = head.textContent ?? "";
    const isDepth =
      /\bmm$/.test(words.trim()) || (inCaption && /^(Root mean square|Mean)$/.test(words.trim()));
    return isDepth && head.classList.contains("number") ? [column] : [];
  });
  return [...(table.tBodies[0]?.rows ?? [])]
    .flatMap((row) => columns.map((column) => row.cells[column]))
    .filter(Boolean);
}

function textsOf(element: Element): Text[] {
  const walker = document.createTreeWalker(element, NodeFilter.SHOW_TEXT);
  const found: Text[] = [];
  for (let node = walker.nextNode(); node !== null; node = walker.nextNode()) {
    // A share or a reason beside the number is none.
    if (node.parentElement?.closest(".heard, .sub, .mark") === null) found.push(node as Text);
  }
  return found;
}

function bareInches(text: string): string {
  return text.replace(/[+\u2212]?\d[\d\u202f]*(?:\.\d+)?/, (printed) =>
    printed.startsWith("+") ? `+${printedInches(printed.slice(1))}` : printedInches(printed),
  );
}
