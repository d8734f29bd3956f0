import type { Grid } from "@rainreckon/core";
import { projection, siteCells } from "@rainreckon/mosaic";
import type { JobRadar } from "./job.ts";

const distances = new WeakMap<JobRadar["site"], Float32Array>();

/** Ground distance of each cell from a radar, worked out once a worker. Shape [cells], metres. */
export function distanceFrom(grid: Grid, { site }: Pick<JobRadar, "site">): Float32Array {
  const known = distances.get(site) ?? siteCells(grid, projection(grid.crs), site).distanceM;
  distances.set(site, known);
  return known;
}
