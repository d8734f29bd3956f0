import { describe, expect, test } from "vitest";
import { checkValue, checkValues, differences, inputNumber } from "../../published/index.ts";
import { beamMean, beamPosition, blockedShare, type EchoProfile, profileDb } from "./beam.ts";

const beams = checkValues("g-beam").filter(
  ({ id, inputs }) => /^beam-[hs]-[\d.]+deg-\d+km$/.test(id) && inputs.earth_radius_km === 6371,
);

describe("the beam over a 4/3 earth (published/radar-physics.json, topic g)", () => {
  test.each(beams.map((entry) => [entry.id, entry] as const))("%s", (id, entry) => {
    const beam = beamPosition(inputNumber(entry, "slant_range_km"), inputNumber(entry, "elevation_deg"));
    expect(differences(entry, id.startsWith("beam-h") ? beam.heightKm * 1000 : beam.arcKm)).toEqual([]);
  });

  test("there are heights and arcs to check", () => {
    expect(beams.length).toBeGreaterThanOrEqual(60);
  });
});

test.each([-1, -0.75, -0.5, -0.25, 0, 0.25, 0.5, 0.75, 0.9, 1])(
  "share of a round beam blocked at y/a = %d (Bech et al. 2003)",
  (y) => {
    expect(differences(checkValue(`pbb-uniform-${y}`), blockedShare(y))).toEqual([]);
  },
);

// The idealised profile of published/radar-physics.json, topic h.
const profile: EchoProfile = { kneesKm: [2.3, 2.65, 3], kneesDb: [0, 6, 0], slopeAboveDbPerKm: -4.5 };

test.each([0, 1, 2, 2.3, 2.475, 2.65, 2.825, 3, 3.5, 4, 5, 6])("profile at %d km", (heightKm) => {
  expect(differences(checkValue(`vpr-point-${heightKm}km`), profileDb(profile, heightKm))).toEqual([]);
});

test.each(["50km-1deg", "100km-1deg", "150km-0.5deg", "150km-1deg", "200km-0.5deg"])(
  "mean of the profile over the beam, %s: within 0.01 dB of the integral",
  (name) => {
    const entry = checkValue(`vpr-beam-${name}`);
    const mean = beamMean(
      (heightKm) => 10 ** (profileDb(profile, heightKm) / 10),
      inputNumber(entry, "beam_height_km"),
      inputNumber(entry, "slant_range_km") * (Math.PI / 180) * inputNumber(entry, "beamwidth_deg"),
      Number.NEGATIVE_INFINITY,
    );
    expect(Math.abs(10 * Math.log10(mean) - Number(entry.expected))).toBeLessThan(0.01);
  },
);
