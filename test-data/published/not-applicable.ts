import type { NotApplicable } from "./suite.ts";

/** Positions of gates on the ellipsoid: the package that projects answers for them, not the one that knows beams. */
export const GEODESIC_ENTRIES = /^(geod-.*|gate-full-(lon|lat))$/;

const FALL_SPEEDS = "no command computes fall speeds; due with the drop sizes of part B";
const SNOW_SPECTRUM = "the spectrum of snow; due with the drop sizes of part B";
const NO_CONVERSION = "no command converts this unit";

/** Check values of the core's topics that no function answers, and why. */
export const CORE_NOT_APPLICABLE = {
  "c-zr-relations": [
    { id: "sekhon-srivastava-*", reason: SNOW_SPECTRUM },
    { id: "vip-*", reason: "levels of one national display; no command speaks in them" },
  ],
  "g-beam-geometry": [
    {
      id: "beam-h-approx",
      reason: "the parabolic approximation: heights come from the exact formula everywhere",
    },
  ],
  "l-units-and-facts": [
    { id: "gk49-*", reason: FALL_SPEEDS },
    { id: "au77-*", reason: FALL_SPEEDS },
    { id: "atlas73-*", reason: FALL_SPEEDS },
    { id: "foote-dutoit", reason: FALL_SPEEDS },
    { id: /^unit-n0-(si|cm)$/, reason: "unit of drop-size spectra; due with part B" },
    { id: "unit-rainconv", reason: "factor of the rain integral over drop sizes; due with part B" },
    { id: "unit-dbkm-nepers", reason: "unit of attenuation; due with part B" },
    { id: "unit-kdp-rad", reason: "unit of differential phase; due with part B" },
    { id: /^unit-(knot|nmi|mile|foot)$/, reason: NO_CONVERSION },
    { id: "unit-mm-m2", reason: NO_CONVERSION },
  ],
} as const satisfies Readonly<Record<string, readonly NotApplicable[]>>;
