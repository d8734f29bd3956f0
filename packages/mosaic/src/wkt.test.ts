import { execFileSync } from "node:child_process";
import { describe, expect, test } from "vitest";
import { projection } from "./projection.ts";

const foreign = process.env.RAINRECKON_FOREIGN_TOOLS === "1";

/** Written by GDAL 3.6.2: `gdalsrsinfo -o wkt_esri EPSG:…`, on one line. */
const ESRI = {
  utm32:
    'PROJCS["ETRS_1989_UTM_Zone_32N",GEOGCS["GCS_ETRS_1989",DATUM["D_ETRS_1989",SPHEROID["GRS_1980",6378137.0,298.257222101]],PRIMEM["Greenwich",0.0],UNIT["Degree",0.0174532925199433]],PROJECTION["Transverse_Mercator"],PARAMETER["False_Easting",500000.0],PARAMETER["False_Northing",0.0],PARAMETER["Central_Meridian",9.0],PARAMETER["Scale_Factor",0.9996],PARAMETER["Latitude_Of_Origin",0.0],UNIT["Meter",1.0]]',
  wgs84:
    'GEOGCS["GCS_WGS_1984",DATUM["D_WGS_1984",SPHEROID["WGS_1984",6378137.0,298.257223563]],PRIMEM["Greenwich",0.0],UNIT["Degree",0.0174532925199433]]',
  britain:
    'PROJCS["British_National_Grid",GEOGCS["GCS_OSGB_1936",DATUM["D_OSGB_1936",SPHEROID["Airy_1830",6377563.396,299.3249646]],PRIMEM["Greenwich",0.0],UNIT["Degree",0.0174532925199433]],PROJECTION["Transverse_Mercator"],PARAMETER["False_Easting",400000.0],PARAMETER["False_Northing",-100000.0],PARAMETER["Central_Meridian",-2.0],PARAMETER["Scale_Factor",0.9996012717],PARAMETER["Latitude_Of_Origin",49.0],UNIT["Meter",1.0]]',
} as const;
/** An invented system on a datum that everybody knows: no code stands for it. */
const OWN =
  'PROJCS["Moor grid",GEOGCS["GCS_ETRS_1989",DATUM["D_ETRS_1989",SPHEROID["GRS_1980",6378137.0,298.257222101]],PRIMEM["Greenwich",0.0],UNIT["Degree",0.0174532925199433]],PROJECTION["Transverse_Mercator"],PARAMETER["False_Easting",20000.0],PARAMETER["False_Northing",-5000000.0],PARAMETER["Central_Meridian",4.5],PARAMETER["Scale_Factor",1.0],PARAMETER["Latitude_Of_Origin",0.0],UNIT["Meter",1.0]]';

describe("well-known text", () => {
  test("a system goes by the code that it states", () => {
    const text = ESRI.utm32.replace(/\]$/, ',AUTHORITY["EPSG","25832"]]').replace("ETRS_1989_UTM", "Some");
    expect(projection(text).projString).toBe(projection("EPSG:25832").projString);
  });

  test("a code of a part is not one of the whole", () => {
    const text = OWN.replace("298.257222101]", '298.257222101,AUTHORITY["EPSG","7019"]]');
    expect(projection(text).projString).toBe(text);
  });

  test("a name as ESRI writes it finds the register's", () => {
    expect(projection(ESRI.utm32).projString).toBe(projection("EPSG:25832").projString);
    expect(projection(ESRI.wgs84)).toMatchObject({
      geographic: true,
      projString: "+proj=longlat +datum=WGS84 +no_defs",
    });
  });

  test("a known name above another projection is not believed", () => {
    const text = ESRI.utm32.replace('"Central_Meridian",9.0', '"Central_Meridian",12.0');
    expect(projection(text).projString).toBe(text);
  });

  test("a datum that needs a shift grid is refused by that name", () => {
    expect(() => projection(ESRI.britain)).toThrow(/datum shift grid OSTN15/);
  });

  test("a datum that nobody knows is refused, unless the text says how it lies", () => {
    const strange = OWN.replace("D_ETRS_1989", "D_Moor_1901");
    expect(() => projection(strange)).toThrow(/not known how the datum "D_Moor_1901"/);
    const stated = strange.replace("298.257222101]", "298.257222101],TOWGS84[100,0,0,0,0,0,0]");
    expect(projection(stated).inverse(20000, 700000)[0]).not.toBe(projection(OWN).inverse(20000, 700000)[0]);
  });

  test.skipIf(!foreign)("agrees with PROJ to 2 mm (RAINRECKON_FOREIGN_TOOLS)", () => {
    const places = [
      [4.1, 51.2],
      [5.9, 50.3],
    ] as const;
    const input = places.map(([lon, lat]) => `${lat} ${lon}`).join("\n");
    const output = execFileSync("cs2cs", ["-f", "%.4f", "EPSG:4258", OWN], { input, encoding: "utf8" });
    for (const [k, line] of output.trim().split("\n").entries()) {
      const [x, y] = line.split(/\s+/).map(Number);
      const [ownX, ownY] = projection(OWN).forward(places[k][0], places[k][1]);
      expect(Math.hypot(ownX - x, ownY - y)).toBeLessThan(0.002);
    }
  });
});
