import type { PageClasses, PageMap } from "../data/contract.ts";
import { TILES } from "../map/tiles.ts";
import { classTable, type Fields } from "./fields.ts";

const PAPER = "#fdfdfb";
const HATCH = "#b4b9bc";
const TILE_INK = "rgba(28,34,39,.55)";

export interface Painting {
  readonly map: PageMap;
  readonly fields: Fields;
  /** Which of the fields. */
  readonly index: number;
  readonly classes: PageClasses;
  /** True where classes are names: each gets its pattern over its colour. */
  readonly named: boolean;
  /** Device pixels to one of the page. */
  readonly density: number;
}

/** Paints the cells of a field over a whole canvas: colours, patterns of names, hatching for not observed. */
export function paint(canvas: HTMLCanvasElement, painting: Painting): void {
  const { map, fields, index, classes, named, density } = painting;
  const { nx, ny, block, codes } = fields;
  const context = canvas.getContext("2d");
  if (context === null) throw new Error("this browser draws no pictures");
  const cells = codes.subarray(index * nx * ny, (index + 1) * nx * ny);
  let largest = 0;
  for (const code of cells) if (code > largest) largest = code;
  const table = classTable(classes, fields, largest);
  // The last row and column of blocks may reach beyond the grid; the canvas cuts them there.
  const width = (canvas.width * nx * block) / map.nx;
  const height = (canvas.height * ny * block) / map.ny;
  const lay = (picture: CanvasImageSource) => context.drawImage(picture, 0, 0, width, height);
  context.imageSmoothingEnabled = false;
  context.fillStyle = PAPER;
  context.fillRect(0, 0, canvas.width, canvas.height);

  const colours = classes.colours.map(rgba);
  lay(picture(nx, ny, (cell) => (table[cells[cell]] < 0 ? undefined : colours[table[cells[cell]]])));
  const masked = (passes: (cell: number) => boolean, pattern: CanvasPattern | null) => {
    const layer = new OffscreenCanvas(canvas.width, canvas.height);
    const over = layer.getContext("2d");
    if (over === null || pattern === null) return;
    over.imageSmoothingEnabled = false;
    over.drawImage(
      picture(nx, ny, (cell) => (passes(cell) ? [0, 0, 0, 255] : undefined)),
      0,
      0,
      width,
      height,
    );
    over.globalCompositeOperation = "source-in";
    over.fillStyle = pattern;
    over.fillRect(0, 0, layer.width, layer.height);
    context.drawImage(layer, 0, 0);
  };
  if (cells.includes(0))
    masked((cell) => cells[cell] === 0, tiled(context, "M0 6L6 0M-1 1L1 -1M5 7L7 5", 6, density, HATCH));
  if (!named) return;
  for (const [name] of classes.colours.entries()) {
    const pattern = tiled(context, TILES[name % TILES.length], 8, density, TILE_INK);
    masked((cell) => table[cells[cell]] === name, pattern);
  }
}

/** One pixel a cell; clear where there is no colour. */
function picture(
  nx: number,
  ny: number,
  colourOf: (cell: number) => readonly number[] | undefined,
): OffscreenCanvas {
  const image = new ImageData(nx, ny);
  for (let cell = 0; cell < nx * ny; cell += 1) {
    const colour = colourOf(cell);
    if (colour !== undefined) image.data.set(colour, 4 * cell);
  }
  const canvas = new OffscreenCanvas(nx, ny);
  canvas.getContext("2d")?.putImageData(image, 0, 0);
  return canvas;
}

function tiled(
  context: CanvasRenderingContext2D,
  path: string,
  side: number,
  density: number,
  ink: string,
): CanvasPattern | null {
  const size = Math.round(side * density);
  const tile = new OffscreenCanvas(size, size);
  const pen = tile.getContext("2d");
  if (pen === null) return null;
  pen.scale(size / side, size / side);
  pen.strokeStyle = ink;
  pen.lineWidth = 1.1;
  pen.stroke(new Path2D(path));
  return context.createPattern(tile, "repeat");
}

/** Red, green, blue, opacity of an `rgb(…)`; undefined where nothing is drawn. */
function rgba(css: string): readonly number[] | undefined {
  const channels = css.match(/\d+/g)?.map(Number);
  return channels === undefined ? undefined : [...channels.slice(0, 3), 255];
}
