import type { PageData } from "../data/contract.ts";
import { el, need, svg } from "./dom.ts";
import type { Fields } from "./fields.ts";
import { paint } from "./paint.ts";
import { cellWords } from "./readout.ts";
import type { Choice, Store } from "./store.ts";
import type { Clock } from "./times.ts";

/** Unpacked fields of the layers, as far as they have been asked for. */
export interface FieldStore {
  layer(index: number): Fields;
  /** The intervals of a layer; undefined where it has none. */
  frames(index: number): Fields | undefined;
}

/** Cells that a move with Shift goes. */
const STRIDE = 10;
/** A gauge this near the keyboard's cursor is meant, in units of the drawing. */
const REACH = 14;

const HINT =
  "Arrow keys move the cursor by a cell, with Shift by ten. Enter looks at what lies there. Page Up and Page Down go from gauge to gauge. Comma and full stop step through time, Space plays. Escape lets go.";

/**
 * Makes the drawing of the map a place to point at: a canvas behind it, a cursor over it, and what lies there in
 * words.
 *
 * @param keys - what the keys that are not the map's own do
 */
export function mapView(
  data: PageData,
  fields: FieldStore,
  store: Store,
  clock: Clock,
  keys: Readonly<Record<string, () => void>>,
): void {
  const { map } = data;
  const drawing = need<SVGSVGElement>("svg.map");
  const sheet = need<HTMLElement>(".map-sheet");
  const canvas = el("canvas", { class: "map-canvas", "aria-hidden": "true" });
  const tip = el("div", { class: "map-tip", "aria-hidden": "true", hidden: true });
  const readout = el("p", { class: "readout", id: "map-readout" });
  const spoken = el("p", { class: "heard", role: "status", "aria-live": "polite" });
  const stage = el("div", {
    class: "map-stage",
    tabindex: 0,
    role: "application",
    "aria-label": "Map",
    "aria-describedby": "map-hint",
  });
  const cursor = svg("rect", { class: "map-cursor", visibility: "hidden" });
  sheet.prepend(stage);
  stage.append(canvas, drawing, tip);
  sheet.append(readout, spoken, el("p", { class: "small hint", id: "map-hint" }, HINT));
  drawing.setAttribute("aria-hidden", "true");
  drawing.append(cursor);
  for (const old of drawing.querySelectorAll(".layer, .paper, title, desc")) old.remove();

  const place = (element: HTMLElement) => {
    element.style.left = `${(100 * map.left) / map.viewWidth}%`;
    element.style.top = `${(100 * map.top) / map.viewHeight}%`;
    element.style.width = `${(100 * map.width) / map.viewWidth}%`;
    element.style.height = `${(100 * map.height) / map.viewHeight}%`;
  };
  place(canvas);

  const current = (choice: Choice) => {
    const layer = data.layers[choice.layer];
    const frames = choice.frame < 0 ? undefined : fields.frames(choice.layer);
    return frames !== undefined && layer.frames !== undefined
      ? { layer, fields: frames, index: choice.frame, classes: layer.frames.classes }
      : { layer, fields: fields.layer(choice.layer), index: 0, classes: layer.classes };
  };

  const draw = (choice: Choice) => {
    const { layer, fields: shown, index, classes } = current(choice);
    // At least two pixels to one, so that hatching and patterns stay fine on paper.
    const density = Math.max(2, window.devicePixelRatio);
    const box = drawing.getBoundingClientRect();
    canvas.width = Math.max(1, Math.round(((box.width * map.width) / map.viewWidth) * density));
    canvas.height = Math.max(1, Math.round(((box.width * map.height) / map.viewWidth) * density));
    paint(canvas, { map, fields: shown, index, classes, named: layer.names !== undefined, density });
    stage.setAttribute("aria-label", `Map: ${layer.label}`);
  };

  const tell = (choice: Choice) => {
    const { cell } = choice;
    if (cell === undefined) {
      readout.textContent = "Point at the map, or press Tab to reach it and move with the arrow keys.";
      cursor.setAttribute("visibility", "hidden");
      tip.hidden = true;
      return;
    }
    const { layer, fields: shown, index } = current(choice);
    const words = cellWords(cell, {
      data,
      layer,
      fields: shown,
      index,
      frame: choice.frame,
      unit: choice.unit,
      clock,
    });
    const title = data.places.find(({ key }) => key === choice.lit)?.title;
    readout.textContent = title === undefined ? words.all : `${title} · ${words.all}`;
    tip.textContent = title === undefined ? words.value : `${title}\n${words.value}`;
    const side = map.width / map.nx;
    const attributes = {
      x: map.left + cell.column * side,
      y: map.top + cell.row * side,
      width: side,
      height: side,
      visibility: "visible",
    };
    for (const [name, value] of Object.entries(attributes)) cursor.setAttribute(name, String(value));
  };

  store.on(["layer", "frame"], draw);
  store.on(["layer", "frame", "cell", "lit", "unit"], tell);
  new ResizeObserver(() => draw(store.choice)).observe(drawing);
  draw(store.choice);
  tell(store.choice);

  /** The cell under a point of the screen; undefined beyond the grid. */
  const cellUnder = (clientX: number, clientY: number): Choice["cell"] => {
    const box = canvas.getBoundingClientRect();
    const column = Math.floor(((clientX - box.left) / box.width) * map.nx);
    const row = Math.floor(((clientY - box.top) / box.height) * map.ny);
    return column >= 0 && row >= 0 && column < map.nx && row < map.ny ? { column, row } : undefined;
  };
  const keyOf = (target: EventTarget | null) =>
    target instanceof Element
      ? (target.closest("[data-place]")?.getAttribute("data-place") ?? undefined)
      : undefined;

  stage.addEventListener("pointermove", (event) => {
    const cell = cellUnder(event.clientX, event.clientY);
    store.set({ cell, lit: keyOf(event.target) });
    if (cell === undefined) return;
    const box = stage.getBoundingClientRect();
    tip.hidden = event.pointerType === "touch";
    const x = event.clientX - box.left;
    tip.style.left = `${x > box.width - 130 ? x - 14 - tip.offsetWidth : x + 14}px`;
    tip.style.top = `${Math.max(0, event.clientY - box.top - 30)}px`;
  });
  stage.addEventListener("pointerleave", () => {
    tip.hidden = true;
    store.set({ lit: undefined });
  });
  stage.addEventListener("click", (event) => {
    const place = keyOf(event.target);
    store.set({ cell: cellUnder(event.clientX, event.clientY), ...(place === undefined ? {} : { place }) });
  });

  const gauges = data.places.filter(({ kind }) => kind === "gauge");
  const cellOf = ({ xM, yM }: { readonly xM: number; readonly yM: number }) => ({
    column: Math.min(map.nx - 1, Math.max(0, Math.floor((xM - map.westM) / map.cellM))),
    row: Math.min(map.ny - 1, Math.max(0, Math.floor((map.northM - yM) / map.cellM))),
  });
  let gauge = -1;
  const go = (columns: number, rows: number) => {
    tip.hidden = true;
    const from = store.choice.cell ?? { column: Math.floor(map.nx / 2), row: Math.floor(map.ny / 2) };
    store.set({
      cell: {
        column: Math.min(map.nx - 1, Math.max(0, from.column + columns)),
        row: Math.min(map.ny - 1, Math.max(0, from.row + rows)),
      },
      lit: undefined,
    });
  };
  const nextGauge = (step: number) => {
    if (gauges.length === 0) return;
    gauge = (gauge + step + gauges.length) % gauges.length;
    store.set({ cell: cellOf(gauges[gauge]), lit: gauges[gauge].key });
  };
  /** What lies at the cursor: a gauge, radar or asset close by, else the catchment around it. */
  const pick = () => {
    const { cell } = store.choice;
    if (cell === undefined) return;
    const side = map.width / map.nx;
    const x = map.left + (cell.column + 0.5) * side;
    const y = map.top + (cell.row + 0.5) * side;
    const unitsPerM = map.width / (map.nx * map.cellM);
    const near = data.places
      .filter(({ kind }) => kind !== "catchment")
      .map(({ key, xM, yM }) => ({
        key,
        far: Math.hypot(
          map.left + (xM - map.westM) * unitsPerM - x,
          map.top + (map.northM - yM) * unitsPerM - y,
        ),
      }))
      .filter(({ far }) => far <= Math.max(REACH, side))
      .sort((a, b) => a.far - b.far)[0];
    const point = new DOMPoint(x, y);
    const around = [...drawing.querySelectorAll<SVGPathElement>(".catchments .outline")].find((path) =>
      path.isPointInFill(point),
    );
    const place = near?.key ?? around?.getAttribute("data-place") ?? undefined;
    if (place === undefined) spoken.textContent = "No gauge and no catchment here.";
    else store.set({ place });
  };

  stage.addEventListener("keydown", (event) => {
    const far = event.shiftKey ? STRIDE : 1;
    const acts: Readonly<Record<string, () => void>> = {
      ArrowLeft: () => go(-far, 0),
      ArrowRight: () => go(far, 0),
      ArrowUp: () => go(0, -far),
      ArrowDown: () => go(0, far),
      PageDown: () => nextGauge(1),
      PageUp: () => nextGauge(-1),
      Enter: pick,
      Escape: () => store.set({ cell: undefined, lit: undefined, place: undefined }),
      ...keys,
    };
    const act = acts[event.key];
    if (act === undefined || event.ctrlKey || event.altKey || event.metaKey) return;
    event.preventDefault();
    act();
    if (store.choice.cell !== undefined && event.key !== "Enter") spoken.textContent = readout.textContent;
  });
}
