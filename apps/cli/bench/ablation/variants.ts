import { SCREENS } from "@rainreckon/core";

/** Part of a plan, laid over the plan of a world; under a key that holds a list, a map is laid over each item. */
export type Overlay = { readonly [key: string]: unknown };

/** One way to reckon a world. */
export interface Variant {
  readonly name: string;
  readonly overlay: Overlay;
}

/** A step of the chain: how a plan says that it is taken, and that it is not. */
export interface Step {
  readonly name: string;
  readonly on: Overlay;
  readonly off: Overlay;
}

/** Laid over each radar: the highest cap that a plan may have, which no echo of a world meets; and the usual one. */
const NO_CAP = { radars: { cap: { dbz: 80 } } };
const CAP = { radars: { cap: { dbz: 53 } } };

/** The world's heights, seen from the folder that the plan lies in. */
const TERRAIN = "terrain.tif";

/** In the order of the chain. */
export const STEPS: readonly Step[] = [
  { name: "cap", on: CAP, off: NO_CAP },
  {
    name: "screening",
    on: { echo: { screening: { use: true } } },
    off: { echo: { screening: { use: false } } },
  },
  {
    name: "blockage",
    on: { echo: { blockage: { use: true, terrain: TERRAIN } } },
    off: { echo: { blockage: { use: false } } },
  },
  { name: "gas", on: { echo: { gas: { use: "if-told" } } }, off: { echo: { gas: { use: "never" } } } },
  {
    name: "attenuation",
    on: { echo: { attenuation: { method: "auto" } } },
    off: { echo: { attenuation: { method: "none" } } },
  },
  { name: "profile", on: { echo: { profile: { use: true } } }, off: { echo: { profile: { use: false } } } },
  {
    name: "rain type",
    on: { echo: { rate: { rainType: true } } },
    off: { echo: { rate: { rainType: false } } },
  },
  {
    name: "polarimetric rate",
    on: { echo: { rate: { polarimetric: true } } },
    off: { echo: { rate: { polarimetric: false } } },
  },
  { name: "hail", on: { echo: { rate: { hail: true } } }, off: { echo: { rate: { hail: false } } } },
];

/** Maps over maps, key by key; where the base has a list, the overlay's map is laid over each item; all else replaces. */
export function merged(base: Overlay, overlay: Overlay): Overlay {
  const out: Record<string, unknown> = { ...base };
  for (const [key, value] of Object.entries(overlay)) {
    const known = base[key];
    if (isMap(value) && Array.isArray(known)) out[key] = known.map((item) => merged(item as Overlay, value));
    else if (isMap(value) && isMap(known)) out[key] = merged(known, value);
    else out[key] = value;
  }
  return out;
}

function isMap(value: unknown): value is Overlay {
  return typeof value === "object" && value !== null && !Array.isArray(value);
}

/** The chain with some steps taken and the others not. */
function chain(name: string, taken: (step: Step, k: number) => boolean): Variant {
  const overlay = STEPS.map((step, k) => (taken(step, k) ? step.on : step.off)).reduce(merged, {});
  return { name, overlay };
}

/** The lowest usable beam with Z = 200 R^1.6 and nothing else. */
export const RAW = chain("raw", () => false);

/** Raw with the usual cap, and without the gates that echo in most rounds of the run: the beam above speaks there. */
export const CAPPED_AND_MASKED: Variant = {
  name: "capped and masked",
  overlay: merged(chain("", ({ name }) => name === "cap").overlay, {
    echo: {
      screening: {
        use: true,
        without: SCREENS.filter((screen) => screen !== "static-echo" && screen !== "fixed-point"),
        fill: "none",
      },
    },
  }),
};

/** Every step. */
export const ALL = chain("all", () => true);

/** Every step, and the calibration that is offered written into the plan, which only a user does. */
export const OFFERS_TAKEN = "all, offers taken";

/** Raw, with the steps up to each in turn; the last of these is `ALL`, under the name of its last step. */
export const ADDED: readonly Variant[] = STEPS.map(({ name }, last) =>
  chain(`+ ${name}`, (_, k) => k <= last),
);

/** Every step but one. */
export const REMOVED: readonly Variant[] = STEPS.map(({ name }) => without(name));

/** Every step but the named one. */
export function without(step: string): Variant {
  return chain(`all − ${step}`, ({ name }) => name !== step);
}

/** Worlds without an artefact, and the step that meets it: there it must leave the map alone. */
export const STEP_WITHOUT_WORK: Readonly<Record<string, string>> = {
  "mixed-without-attenuation": "attenuation",
  "mixed-without-false-echo": "screening",
  "mixed-without-bright-band": "profile",
  "mixed-without-blockage": "blockage",
  "mixed-without-hail": "hail",
};

/** The ways in which a world is reckoned: those that the aims need, or each step too. */
export function variantsFor(world: string, steps: boolean): Variant[] {
  const idle = STEP_WITHOUT_WORK[world];
  if (steps) return [RAW, CAPPED_AND_MASKED, ...ADDED.slice(0, -1), ALL, ...REMOVED];
  return [RAW, CAPPED_AND_MASKED, ALL, ...(idle === undefined ? [] : [without(idle)])];
}
