import { type Catchment, InputError, type Ring } from "@rainreckon/core";
import { z } from "zod";
import { displayText } from "./display-text.ts";
import { FileNotices, type OnNotice } from "./file-notices.ts";
import type { GeoJsonFeature } from "./geojson.ts";
import { readMapFeatures } from "./map-features.ts";
import { ringCrossing } from "./ring-crossing.ts";
import type { ShapefileParts } from "./shapefile.ts";

/** Most positions in one file. */
const MAX_VERTICES = 5_000_000;

export interface CatchmentFields {
  /** Property that holds the id; "id" also finds the feature's own id. */
  readonly id: string;
  /** Property that holds the name; the id where left out or empty. */
  readonly name?: string | undefined;
  /** Coordinate system of the rings, over whatever the file says. */
  readonly crs?: string | undefined;
  /** Layer of a GeoPackage; needed where it has several of polygons. */
  readonly layer?: string | undefined;
  /** The files that belong to a Shapefile, where they are there; without its .dbf there are no ids. */
  readonly parts?: ShapefileParts | undefined;
}

/** Why one catchment cannot be used: what is wrong, what to do. */
class Unusable {
  readonly what: string;
  readonly fix: string;
  constructor(what: string, fix: string) {
    this.what = what;
    this.fix = fix;
  }
}

const polygonCoordinates = z.array(z.array(z.array(z.unknown())));
const multiPolygonCoordinates = z.array(polygonCoordinates);

/**
 * Reads the catchments of a map: GeoJSON, the .shp of a Shapefile, or a layer of a GeoPackage.
 *
 * A feature that cannot stand for a catchment (no polygon, no id, a ring that crosses itself, an id that
 * another shape has too) is left out and told. Open rings are closed and told. Which way round a ring runs
 * does not matter.
 *
 * @param path - of at most 5 million positions; GeoJSON of at most 200 MiB
 * @returns catchments in the order of the file; `crs` undefined is longitude, latitude
 * @throws InputError where the file cannot be read at all, neither it nor `fields` names the coordinate
 * system, or no catchment is left
 */
export async function readCatchments(
  path: string,
  fields: CatchmentFields,
  onNotice: OnNotice,
): Promise<readonly Catchment[]> {
  const document = await readMapFeatures(path, fields);
  if (!document.crsKnown && fields.crs === undefined) {
    throw new InputError(
      "nothing says what system the coordinates are in",
      path,
      document.format === "Shapefile"
        ? "put its .prj beside it, or write catchments.crs in the plan"
        : "write catchments.crs in the plan",
    );
  }
  const notices = new FileNotices(onNotice);
  const crs = fields.crs ?? document.crs;
  const reader = new PolygonReader(path, crs === undefined);
  const found = new Map<string, { catchment: Catchment; number: number; spoilt: boolean }>();
  document.features.forEach((feature, index) => {
    const number = index + 1;
    const where = `${path}, feature ${number}`;
    try {
      if (typeof feature === "string") throw new Unusable(feature, "export the polygons again");
      const id = idOf(feature, fields.id);
      const polygons = reader.polygons(feature);
      if (reader.closedRings > 0) {
        notices.tell(
          "catchments with open rings",
          `catchment "${displayText(id, 60)}": ${reader.closedRings} rings were not closed, and are now`,
          where,
          [],
          "nothing to do",
        );
      }
      if (reader.uncheckedRings > 0) {
        notices.tell(
          "catchments too intricate to check",
          `catchment "${displayText(id, 60)}" is too intricate to check whether its outline crosses itself`,
          where,
          [],
          "simplify the outline",
        );
      }
      const catchment: Catchment = {
        id,
        name: nameOf(feature, fields.name) ?? id,
        polygons,
        ...(crs === undefined ? {} : { crs }),
      };
      const before = found.get(id);
      if (before === undefined) {
        found.set(id, { catchment, number, spoilt: false });
        return;
      }
      const same = JSON.stringify(before.catchment.polygons) === JSON.stringify(polygons);
      if (!same) before.spoilt = true;
      notices.tell(
        "catchments with the id of another",
        same
          ? `catchment "${displayText(id, 60)}" is the same as feature ${before.number}: counted once`
          : `catchment "${displayText(id, 60)}" has the id of feature ${before.number} and another shape: both are left out`,
        where,
        [],
        same ? "nothing to do" : "join the parts into one MultiPolygon, or give each an id of its own",
      );
    } catch (fault) {
      if (!(fault instanceof Unusable)) throw fault;
      notices.tell(
        "features left out",
        `${labelOf(feature, fields.id)}${fault.what}: left out`,
        where,
        [],
        fault.fix,
      );
    }
  });
  notices.close();
  const catchments = [...found.values()].filter((entry) => !entry.spoilt).map((entry) => entry.catchment);
  if (catchments.length === 0) {
    throw new InputError("no catchment is left", path, `check the polygons and the id field "${fields.id}"`);
  }
  return catchments;
}

function idOf(feature: GeoJsonFeature, field: string): string {
  const value = feature.properties?.[field] ?? (field === "id" ? feature.id : undefined);
  const id = typeof value === "string" || typeof value === "number" ? String(value).trim() : "";
  if (id !== "") return id;
  const there = Object.keys(feature.properties ?? {})
    .slice(0, 8)
    .map((key) => `"${displayText(key, 40)}"`);
  throw new Unusable(
    `there is no id in the property "${displayText(field, 60)}"`,
    there.length === 0 ? "give each feature an id" : `name one of ${there.join(", ")}`,
  );
}

function nameOf(feature: GeoJsonFeature, field: string | undefined): string | undefined {
  const value = field === undefined ? undefined : feature.properties?.[field];
  const name = typeof value === "string" || typeof value === "number" ? String(value).trim() : "";
  return name === "" ? undefined : name;
}

function labelOf(feature: GeoJsonFeature | string, field: string): string {
  if (typeof feature === "string") return "";
  const value = feature.properties?.[field] ?? feature.id;
  return value === undefined || value === null ? "" : `catchment "${displayText(value, 60)}": `;
}

/** Turns the coordinates of features into checked rings, within one bound for the whole file. */
class PolygonReader {
  /** Of the last feature. */
  closedRings = 0;
  uncheckedRings = 0;

  readonly #path: string;
  readonly #inDegrees: boolean;
  #vertices = 0;

  constructor(path: string, inDegrees: boolean) {
    this.#path = path;
    this.#inDegrees = inDegrees;
  }

  polygons(feature: GeoJsonFeature): Ring[][] {
    this.closedRings = 0;
    this.uncheckedRings = 0;
    const { geometry } = feature;
    if (geometry === null || geometry === undefined)
      throw new Unusable("it has no geometry", "draw a polygon");
    if (geometry.type !== "Polygon" && geometry.type !== "MultiPolygon") {
      throw new Unusable(
        `it is a ${displayText(geometry.type, 40)}, not a Polygon or MultiPolygon`,
        "give polygons",
      );
    }
    const list = geometry.type === "Polygon" ? [geometry.coordinates] : geometry.coordinates;
    const read = multiPolygonCoordinates.safeParse(list);
    if (!read.success) throw new Unusable("its coordinates are not nested as in GeoJSON", "export it again");
    // A polygon without rings is GeoJSON's empty polygon.
    const polygons = read.data.filter((rings) => rings.length > 0);
    if (polygons.length === 0) throw new Unusable("its geometry is empty", "draw a polygon");
    return polygons.map((rings) => rings.map((ring) => this.#ring(ring)));
  }

  #ring(raw: readonly (readonly unknown[])[]): Ring {
    this.#vertices += raw.length;
    if (this.#vertices > MAX_VERTICES) {
      throw new InputError(
        `there are more than ${MAX_VERTICES} positions`,
        this.#path,
        "simplify the polygons",
      );
    }
    const ring = raw.map((position) => this.#position(position));
    const first = ring[0];
    const last = ring[ring.length - 1];
    if (ring.length > 0 && (first[0] !== last[0] || first[1] !== last[1])) {
      ring.push(first);
      this.closedRings += 1;
    }
    if (ring.length < 4) throw new Unusable("a ring has fewer than four positions", "draw it again");
    const crossing = ringCrossing(ring);
    if (crossing === "too-intricate") this.uncheckedRings += 1;
    else if (crossing !== undefined) {
      throw new Unusable(
        `its outline crosses itself near ${tidy(crossing[0])}, ${tidy(crossing[1])}`,
        "repair the polygon",
      );
    }
    if (enclosesNothing(ring)) throw new Unusable("a ring encloses no area", "draw it again");
    return ring;
  }

  #position(position: readonly unknown[]): readonly [number, number] {
    const [x, y] = position;
    if (typeof x !== "number" || typeof y !== "number") {
      throw new Unusable("a position is not two numbers", "export it again");
    }
    if (this.#inDegrees && (Math.abs(x) > 360 || Math.abs(y) > 90)) {
      throw new Unusable(
        `the position ${tidy(x)}, ${tidy(y)} is not longitude and latitude`,
        "name the coordinate system in the plan (catchments.crs)",
      );
    }
    return [x, y];
  }
}

/** Whether all positions lie on one line. */
function enclosesNothing(ring: Ring): boolean {
  const [x0, y0] = ring[0];
  let twice = 0;
  let extent = 0;
  for (let index = 0; index + 1 < ring.length; index++) {
    const ax = ring[index][0] - x0;
    const ay = ring[index][1] - y0;
    const bx = ring[index + 1][0] - x0;
    const by = ring[index + 1][1] - y0;
    twice += ax * by - ay * bx;
    extent = Math.max(extent, Math.abs(ax), Math.abs(ay));
  }
  return !(Math.abs(twice) > extent * extent * 1e-12);
}

function tidy(value: number): string {
  return String(Number(value.toPrecision(9)));
}
