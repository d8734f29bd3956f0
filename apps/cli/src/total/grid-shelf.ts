import { createHash } from "node:crypto";
import type { Grid } from "@rainreckon/core";
import type { GriddedHeader } from "@rainreckon/formats";
import { type CellLookup, gridLookup, projection } from "@rainreckon/mosaic";
import type { JobGrids } from "./job.ts";
import { sourceCells } from "./source-cells.ts";

/** Lookups kept for each gridded source: its cells hardly ever move. */
const KEPT_PER_SOURCE = 4;

const shelves = new WeakMap<JobGrids, Map<string, CellLookup>>();

/**
 * The lookup of a layer's cells on the grid, built once for each place that the layers of a source have.
 *
 * @throws InputError where the layer's coordinate system is not known
 */
export function layerLookup(
  grid: Grid,
  source: JobGrids,
  header: Pick<GriddedHeader, "place" | "nx" | "ny">,
): CellLookup {
  const shelf = shelves.get(source) ?? new Map<string, CellLookup>();
  shelves.set(source, shelf);
  const key = placeKey(header);
  let lookup = shelf.get(key);
  if (lookup === undefined) {
    lookup = gridLookup(grid, projection(grid.crs), sourceCells(header));
    if (shelf.size >= KEPT_PER_SOURCE) shelf.delete(shelf.keys().next().value as string);
  } else {
    shelf.delete(key);
  }
  shelf.set(key, lookup);
  return lookup;
}

/** The same for layers whose cells lie in the same places. */
export function placeKey({ place, nx, ny }: Pick<GriddedHeader, "place" | "nx" | "ny">): string {
  if (place.kind !== "positions") return JSON.stringify([nx, ny, place]);
  const hash = createHash("sha256");
  for (const degrees of [place.lonDeg, place.latDeg])
    hash.update(new Uint8Array(degrees.buffer, degrees.byteOffset, degrees.byteLength));
  return JSON.stringify([nx, ny, hash.digest("hex")]);
}
