import type { PageData } from "../data/contract.ts";
import { need } from "./dom.ts";
import type { Choice, Store } from "./store.ts";

/** Marks of one place stand together, on the map and in every scatter: pointing at one lights up the others. */
export function linkPlaces(data: PageData, store: Store): void {
  const marks = [...document.querySelectorAll<SVGElement>("[data-place]")];
  const keyOf = (mark: Element) => mark.getAttribute("data-place") ?? undefined;
  const show = ({ lit, place }: Choice) => {
    for (const mark of marks) {
      mark.classList.toggle("lit", lit !== undefined && keyOf(mark) === lit);
      mark.classList.toggle("chosen", place !== undefined && keyOf(mark) === place);
    }
  };
  store.on(["lit", "place"], show);

  for (const scatter of document.querySelectorAll<SVGSVGElement>("svg.scatter")) {
    scatter.setAttribute("role", "group");
    const own = [...scatter.querySelectorAll<SVGElement>("[data-place]")].sort(
      (a, b) => placeX(a) - placeX(b),
    );
    for (const [at, mark] of own.entries()) {
      mark.setAttribute("role", "button");
      mark.setAttribute("tabindex", at === 0 ? "0" : "-1");
      mark.setAttribute("aria-label", mark.querySelector("title")?.textContent ?? "");
      const choose = () => {
        store.set({ place: keyOf(mark) });
        need(".place-panel").scrollIntoView({ block: "nearest" });
      };
      mark.addEventListener("pointerenter", () => store.set({ lit: keyOf(mark) }));
      mark.addEventListener("pointerleave", () => store.set({ lit: undefined }));
      mark.addEventListener("focus", () => store.set({ lit: keyOf(mark), ...cellOf(data, keyOf(mark)) }));
      mark.addEventListener("blur", () => store.set({ lit: undefined }));
      mark.addEventListener("click", choose);
      mark.addEventListener("keydown", (event) => {
        if (event.key === "Enter" || event.key === " ") {
          event.preventDefault();
          return choose();
        }
        const step = { ArrowRight: 1, ArrowUp: 1, ArrowLeft: -1, ArrowDown: -1 }[event.key];
        if (step === undefined) return;
        event.preventDefault();
        const next = own[(at + step + own.length) % own.length];
        mark.setAttribute("tabindex", "-1");
        next.setAttribute("tabindex", "0");
        next.focus();
      });
    }
  }
}

function placeX(mark: Element): number {
  return Number(/translate\(([-\d.]+)/.exec(mark.getAttribute("transform") ?? "")?.[1] ?? 0);
}

/** The cell of a place, so that the map says what lies there. */
function cellOf({ map, places }: PageData, key: string | undefined): Partial<Choice> {
  const place = places.find((one) => one.key === key);
  if (place === undefined) return {};
  const column = Math.floor((place.xM - map.westM) / map.cellM);
  const row = Math.floor((map.northM - place.yM) / map.cellM);
  return column >= 0 && row >= 0 && column < map.nx && row < map.ny ? { cell: { column, row } } : {};
}
