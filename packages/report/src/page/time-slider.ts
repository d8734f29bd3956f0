import type { PageData } from "../data/contract.ts";
import { button, el, need } from "./dom.ts";
import type { Choice, Store } from "./store.ts";
import type { Clock } from "./times.ts";

/** How long a frame stands while the map plays, milliseconds. */
const FRAME_MS = 600;

/**
 * The slider below the map: its left end is the whole window, then the intervals in order.
 *
 * @returns what the map's own keys do with time
 */
export function timeSlider(data: PageData, store: Store, clock: Clock): Readonly<Record<string, () => void>> {
  const intervalsOf = ({ layer }: Choice) => data.layers[layer].frames?.intervals ?? [];
  if (data.layers.every(({ frames }) => frames === undefined)) return {};
  const range = el("input", {
    type: "range",
    id: "map-time",
    min: 0,
    max: 1,
    step: 1,
    value: 0,
    "aria-label": "Time",
  });
  const output = el("output", { for: "map-time", class: "time-words" });
  let playing: ReturnType<typeof setInterval> | undefined;

  const move = (to: number) => {
    const last = intervalsOf(store.choice).length - 1;
    store.set({ frame: Math.max(-1, Math.min(last, to)) });
  };
  const stop = () => {
    clearInterval(playing);
    playing = undefined;
    show(store.choice);
  };
  const toggle = () => {
    if (playing !== undefined) return stop();
    const count = intervalsOf(store.choice).length;
    if (count === 0) return;
    move(store.choice.frame + 1 < count ? store.choice.frame + 1 : 0);
    playing = setInterval(() => {
      const frames = intervalsOf(store.choice).length;
      if (frames === 0) stop();
      else store.set({ frame: (store.choice.frame + 1) % frames });
    }, FRAME_MS);
    show(store.choice);
  };
  const play = button("Play", toggle, { class: "play" });
  const back = button("\u2039", () => move(store.choice.frame - 1), { "aria-label": "Earlier interval" });
  const on = button("\u203a", () => move(store.choice.frame + 1), { "aria-label": "Later interval" });
  const whole = button("Whole window", () => {
    stop();
    move(-1);
  });
  range.addEventListener("input", () => move(Number(range.value) - 1));

  const show = (choice: Choice) => {
    const intervals = intervalsOf(choice);
    const none = intervals.length === 0;
    const interval = intervals[choice.frame];
    range.max = String(Math.max(1, intervals.length));
    range.value = String(choice.frame + 1);
    for (const control of [range, play, back, on]) control.disabled = none;
    whole.disabled = none || choice.frame < 0;
    back.disabled ||= choice.frame < 0;
    on.disabled ||= choice.frame >= intervals.length - 1;
    play.textContent = playing === undefined ? "Play" : "Pause";
    play.setAttribute("aria-pressed", String(playing !== undefined));
    const words = none
      ? "This layer holds for the whole window"
      : interval === undefined
        ? `Whole window: ${clock.span(data.window)}`
        : clock.span(interval);
    output.textContent = words;
    range.setAttribute("aria-valuetext", words);
  };
  store.on(["layer"], (choice) => {
    if (intervalsOf(choice).length === 0) {
      if (playing !== undefined) stop();
      if (choice.frame >= 0) store.set({ frame: -1 });
    }
  });
  store.on(["layer", "frame"], show);
  need(".map-sheet").append(
    el(
      "div",
      { class: "time-bar", role: "group", "aria-label": "Time on the map" },
      play,
      back,
      range,
      on,
      whole,
      output,
    ),
  );
  show(store.choice);
  return {
    ",": () => move(store.choice.frame - 1),
    ".": () => move(store.choice.frame + 1),
    " ": toggle,
  };
}
