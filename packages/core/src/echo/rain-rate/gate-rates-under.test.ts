import { describe, expect, test } from "vitest";
import { findRelation } from "../../relations.ts";
import { gateRates, gateRatesUnder } from "./gate-rates.ts";
import { type GateRateSettings, POLARIMETRIC_RATE_DEFAULTS, rateTables } from "./rate-tables.ts";
import { testEcho } from "./test-echo.ts";

const [RAYS, GATES] = [36, 40];
const S_BAND_M = 0.107;
const settingsOf = (relation: string): GateRateSettings => ({
  relation: findRelation(relation),
  cap: { dbz: 53 },
  minRateMmPerHour: 0.1,
  polarimetric: POLARIMETRIC_RATE_DEFAULTS,
});
const IN_USE = settingsOf("marshall-1955-200/1.6");
const OTHER = settingsOf("rosenfeld-1993-250/1.2");
const ALL_GATES = Int32Array.from({ length: RAYS * GATES }, (_, gate) => gate);

/** Rain from none to a core of hail, with gates that were not observed and gates that are dry. */
function storm(withKdp: boolean) {
  return testEcho(
    RAYS,
    GATES,
    (ray, gate) => {
      const dbz = 62 - Math.hypot(ray - 18, gate - 20) * 3.1;
      if (gate === 3) return { dbz: Number.NaN };
      if (dbz < 0) return { dbz: Number.NEGATIVE_INFINITY };
      const isHail = dbz > 55;
      return {
        dbz,
        zdrDb: isHail ? 0.1 : dbz / 25,
        rhohv: isHail ? 0.94 : 0.99,
        ...(withKdp ? { kdpDegPerKm: 10 ** ((dbz - 48) / 14) } : {}),
      };
    },
    S_BAND_M,
    1000,
  );
}

describe.each([true, false])("rates under another relation, with KDP: %s", (withKdp) => {
  const echo = storm(withKdp);
  const tables = rateTables(OTHER, S_BAND_M);
  const { compared } = gateRates(echo, undefined, IN_USE, rateTables(IN_USE, S_BAND_M));
  const marks = echo.marks.slice();
  const whole = gateRates(storm(withKdp), undefined, OTHER, tables).rateMmPerHour;

  test("the storm has what makes a difference: hail, rain, dry gates, and gates that were not observed", () => {
    const { gatesByMethod, hailGates } = gateRates(storm(withKdp), undefined, OTHER, tables).counts;
    expect(hailGates).toBeGreaterThan(3);
    expect(gatesByMethod.filter((gates) => gates > 0).length).toBeGreaterThanOrEqual(withKdp ? 4 : 3);
  });

  test("at all gates they are what they are as the relation in use, to the bit; nothing is marked", () => {
    expect(gateRatesUnder(echo, undefined, OTHER, tables, ALL_GATES, compared)).toEqual(whole);
    expect(gateRatesUnder(echo, undefined, OTHER, tables, ALL_GATES)).toEqual(whole);
    expect(echo.marks).toEqual(marks);
  });

  test("at some gates they are the same, wherever the others are; those not asked for are not observed", () => {
    const some = ALL_GATES.filter((gate) => gate % 7 === 2);
    const rates = gateRatesUnder(echo, undefined, OTHER, tables, Int32Array.of(...some, ...some), compared);
    expect([...rates]).toEqual(Array.from(whole, (rate, gate) => (gate % 7 === 2 ? rate : Number.NaN)));
  });
});
