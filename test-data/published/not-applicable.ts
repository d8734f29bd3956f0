import type { NotApplicable } from "./suite.ts";

/** What the correction of attenuation answers for, beside its own code. */
export const ATTENUATION_CORRECTION_ENTRIES =
  /^(hb-(uniform-(bracket|recovered)|cell-.*|blowup-.*|error-growth.*)|gbg-.*|phidp-.*|zphi-.*)$/;

/** Positions of gates on the ellipsoid: the package that projects answers for them, not the one that knows beams. */
export const GEODESIC_ENTRIES = /^(geod-.*|gate-full-(lon|lat))$/;

const SNOW_SPECTRUM = "no command works with the drop-size spectrum of snow";
const NO_CONVERSION = "no command converts this unit";

/** Check values of the core's topics that no function answers, and why. */
export const CORE_NOT_APPLICABLE = {
  "a-radar-equation": [
    {
      id: "bw70-*",
      reason: "a rule of thumb; the width of a dish comes from the 1.27 of a tapered one",
    },
  ],
  "b-reflectivity-and-dsd": [
    { id: "avg-db-*", reason: "the wrong way to average, which nothing here may do" },
  ],
  "e-rain-attenuation": [
    {
      id: "darwin-c-2way",
      reason:
        "a relation of one place, tropical rain with its cloud; rain attenuation is that of ITU-R P.838-3",
    },
    { id: "gunn-east-*", reason: "an older law from memory; rain attenuation is that of ITU-R P.838-3" },
    {
      id: "radome-*",
      reason: "measured at single radomes; the loss of a wet radome is a number that the user gives",
    },
  ],
  "f-gaseous-attenuation": [
    {
      id: "gas-dz10cm-*",
      reason: "a fit for one wavelength, from memory; losses by gases are summed line by line",
    },
  ],
  "c-zr-relations": [
    { id: /^sekhon-srivastava-(n0|lambda)$/, reason: SNOW_SPECTRUM },
    { id: "vip-*", reason: "levels of one national display; no command speaks in them" },
  ],
  "g-beam-geometry": [
    {
      id: "beam-h-approx",
      reason: "the parabolic approximation: heights come from the exact formula everywhere",
    },
  ],
  "l-units-and-facts": [
    { id: /^unit-n0-(si|cm)$/, reason: "other units of N0; all spectra here are per m3 and mm" },
    { id: "brandes-*", reason: "a polynomial from memory; fall speeds are measured or of two other laws" },
    { id: /^unit-(knot|nmi|mile|foot)$/, reason: NO_CONVERSION },
    { id: "unit-mm-m2", reason: NO_CONVERSION },
  ],
} as const satisfies Readonly<Record<string, readonly NotApplicable[]>>;
