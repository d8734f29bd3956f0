/** What the reader has chosen. */
export interface Choice {
  /** Index of the layer of the map. */
  readonly layer: number;
  /** Index of the interval; -1 for the whole window. */
  readonly frame: number;
  /** Cell of the grid under the pointer or the keyboard's cursor. */
  readonly cell: { readonly column: number; readonly row: number } | undefined;
  /** Key of the place that is looked at. */
  readonly place: string | undefined;
  /** Key of the place that is pointed at, on the map or in a chart. */
  readonly lit: string | undefined;
  readonly unit: "mm" | "in";
}

type Listener = (choice: Choice) => void;

/** The reader's choices, and who wants to know of them. */
export class Store {
  #choice: Choice;
  readonly #listeners: { readonly keys: readonly (keyof Choice)[]; readonly act: Listener }[] = [];

  constructor(first: Choice) {
    this.#choice = first;
  }

  get choice(): Choice {
    return this.#choice;
  }

  /** Calls back when one of the named choices has changed. */
  on(keys: readonly (keyof Choice)[], act: Listener): void {
    this.#listeners.push({ keys, act });
  }

  set(change: Partial<Choice>): void {
    const before = this.#choice;
    this.#choice = { ...before, ...change };
    for (const { keys, act } of this.#listeners) {
      if (keys.some((key) => before[key] !== this.#choice[key])) act(this.#choice);
    }
  }
}
