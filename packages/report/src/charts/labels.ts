/** A box on a drawing: left, top, width, height. */
export interface Box {
  readonly x: number;
  readonly y: number;
  readonly width: number;
  readonly height: number;
}

export interface PlacedLabel {
  /** Index of the mark it belongs to. */
  readonly mark: number;
  readonly text: string;
  readonly x: number;
  readonly y: number;
  readonly anchor: "start" | "end" | "middle";
}

/** True where two boxes share more than an edge. */
export function overlap(a: Box, b: Box): boolean {
  return a.x < b.x + b.width && b.x < a.x + a.width && a.y < b.y + b.height && b.y < a.y + a.height;
}

/**
 * Places labels beside their marks where they meet neither a mark nor each other; a label without room is
 * left out (its words stay on the mark itself).
 *
 * @param marks - in order of importance, each with its centre and label
 * @param frame - where labels may stand
 * @param held - boxes that other things hold already
 */
export function placeLabels(
  marks: readonly { readonly x: number; readonly y: number; readonly text: string }[],
  frame: Box,
  fontPx: number,
  held: readonly Box[] = [],
): PlacedLabel[] {
  const taken: Box[] = [...held, ...marks.map(({ x, y }) => ({ x: x - 5, y: y - 5, width: 10, height: 10 }))];
  const placed: PlacedLabel[] = [];
  for (const [mark, { x, y, text }] of marks.entries()) {
    // Without a font at hand: letters are about 0.6 of their size wide in the usual sans-serif faces.
    const width = text.length * fontPx * 0.6;
    const height = fontPx;
    const choices: { label: PlacedLabel; box: Box }[] = [
      {
        label: { mark, text, x: x + 8, y: y + fontPx * 0.35, anchor: "start" },
        box: { x: x + 7, y: y - height / 2, width, height },
      },
      {
        label: { mark, text, x: x - 8, y: y + fontPx * 0.35, anchor: "end" },
        box: { x: x - 7 - width, y: y - height / 2, width, height },
      },
      {
        label: { mark, text, x, y: y - 8, anchor: "middle" },
        box: { x: x - width / 2, y: y - 8 - height, width, height },
      },
      {
        label: { mark, text, x, y: y + 8 + fontPx * 0.75, anchor: "middle" },
        box: { x: x - width / 2, y: y + 7, width, height },
      },
    ];
    const free = choices.find(
      ({ box }) =>
        box.x >= frame.x &&
        box.y >= frame.y &&
        box.x + box.width <= frame.x + frame.width &&
        box.y + box.height <= frame.y + frame.height &&
        !taken.some((other) => overlap(box, other)),
    );
    if (!free) continue;
    taken.push(free.box);
    placed.push(free.label);
  }
  return placed;
}
