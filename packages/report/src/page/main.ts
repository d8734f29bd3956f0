import type { PageData } from "../data/contract.ts";
import { need } from "./dom.ts";
import { type Fields, unpack } from "./fields.ts";
import { layerControls, legend } from "./layers.ts";
import { linkPlaces } from "./links.ts";
import { mapView } from "./map-view.ts";
import { pageTools } from "./page-tools.ts";
import { placePanel } from "./place-panel.ts";
import { Store } from "./store.ts";
import { tableTools } from "./tables.ts";
import { timeSlider } from "./time-slider.ts";
import { Clock } from "./times.ts";
import { unitSwitch } from "./units.ts";

/** Everything that the script adds to a page which already stands without it. */
async function begin(): Promise<void> {
  const data = JSON.parse(need("#report-data").textContent ?? "") as PageData;
  const store = new Store({
    layer: data.shown,
    frame: -1,
    cell: undefined,
    place: undefined,
    lit: undefined,
    unit: "mm",
  });
  document.documentElement.classList.add("scripted");
  pageTools(store);
  for (const table of document.querySelectorAll<HTMLTableElement>(".scroll > table")) lateTools(table);
  unitSwitch(store);
  if (data.layers.length > 0) await liveMap(data, store);
  document.documentElement.classList.add("ready");
}

/** A table inside a closed fold gets its tools when the fold is opened: there may be hundreds. */
function lateTools(table: HTMLTableElement): void {
  const holder = table.parentElement;
  if (holder === null) return;
  const fold = table.closest("details");
  if (fold === null) tableTools(table, holder);
  else fold.addEventListener("toggle", () => tableTools(table, holder), { once: true });
}

/** The map comes alive once its fields are unpacked; until then, and where that fails, it stands as it was printed. */
async function liveMap(data: PageData, store: Store): Promise<void> {
  const layers = await Promise.all(data.layers.map(({ field }) => unpack(field)));
  const frames = await Promise.all(
    data.layers.map(({ frames: own }): Promise<Fields> | undefined =>
      own === undefined ? undefined : unpack(own.fields),
    ),
  );
  const fields = { layer: (index: number) => layers[index], frames: (index: number) => frames[index] };
  const clock = new Clock(data);
  layerControls(data, store);
  legend(data, store);
  const keys: Record<string, () => void> = {};
  mapView(data, fields, store, clock, keys);
  Object.assign(keys, timeSlider(data, store, clock));
  placePanel(data, store, clock);
  linkPlaces(data, store);
}

void begin();
