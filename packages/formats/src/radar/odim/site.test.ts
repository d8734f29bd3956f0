import { expect, test } from "vitest";
import { radarSite } from "./site.ts";

const position = { lonDeg: 3.25, latDeg: -52.5, antennaHeightM: 41.5 };

// Identity in the order of the design: NOD, then RAD, then a WMO number that is one, then the position.
// Keys of what/source: ODIM_H5 2.3, EUMETNET OPERA (2019), table of source identifiers.
test.each([
  ["NOD:frave,PLC:Avesnes,WMO:07083", "frave", "Avesnes"],
  ["WMO:01104,NOD:norst", "norst", undefined],
  ["RAD:FR41,WMO:07083,CTY:630", "RAD-FR41", "630"],
  ["WMO:07083,PLC: Avesnes ,CTY:630", "WMO-07083", "Avesnes"],
  ["WMO:00000,RAD:XX1", "RAD-XX1", undefined],
  ["WMO:00000", "AT--52.5000-3.2500", undefined],
  ["", "AT--52.5000-3.2500", undefined],
  ["NOD:../../etc,WMO:07083", "WMO-07083", undefined],
  ["PLC:\u001b[31mred\u202e", "AT--52.5000-3.2500", "[31mred"],
])("%s is %s", (source, id, name) => {
  expect(radarSite(source, position)).toEqual({ id, ...(name === undefined ? {} : { name }), ...position });
});
