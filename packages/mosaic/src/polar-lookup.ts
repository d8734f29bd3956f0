import {
  arcDistanceM,
  beamAboveArc,
  cellIndexAt,
  effectiveRadiusM,
  type Grid,
  gateGeometry,
  type RadarSite,
} from "@rainreckon/core";
import { blendWeight } from "./blend-weight.ts";
import { geodesicDirect } from "./geodesic.ts";
import type { Projection } from "./projection.ts";
import type { CellLookup } from "./rate-layer.ts";
import type { SiteCells } from "./site-cells.ts";

/** The shape of a sweep: all that decides which gate lies in which cell. */
export interface SweepGeometry {
  readonly site: RadarSite;
  readonly elevationDeg: number;
  /** Shape [rayCount], ascending. */
  readonly azimuthDeg: Float64Array;
  readonly gateCount: number;
  readonly firstGateCentreM: number;
  readonly gateLengthM: number;
  readonly beamWidthDeg: number;
}

/** A sector in which a sweep does not speak, because something stands in the beam. */
export interface BlockedSector {
  readonly fromAzimuthDeg: number;
  readonly toAzimuthDeg: number;
  readonly upToElevationDeg: number;
}

export interface LookupRules {
  readonly effectiveRadiusFactor: number;
  /** Highest beam centre above the antenna at which the sweep still speaks for the ground. */
  readonly maxBeamHeightM: number;
  readonly taperM: number;
  readonly blockedSectors: readonly BlockedSector[];
}

/**
 * Which gates make which cell, for one sweep geometry on one grid. Only cells that the sweep may
 * speak for are listed: inside its reach, under the height limit, outside blocked sectors. A gate's index is
 * ray * gateCount + gate.
 */
export interface PolarLookup extends CellLookup {
  /** Ground distance at which this sweep stops speaking, for its reach or its height. */
  readonly coverageM: number;
}

/** Ground spacing of exactly solved points along a ray; a geodesic bends by about a centimetre in between. */
const NODE_SPACING_M = 5000;

/** True where an azimuth lies in a sector that may wrap over north; from 0 to 360 is all around. */
function inSector(azimuthDeg: number, sector: BlockedSector): boolean {
  const turn = sector.toAzimuthDeg - sector.fromAzimuthDeg;
  const width = turn < 0 ? turn + 360 : turn;
  return (azimuthDeg - sector.fromAzimuthDeg + 360) % 360 <= width;
}

/** The cell of every gate centre: shape [rayCount * gateCount], -1 outside the grid. */
function cellsOfGates(grid: Grid, map: Projection, geometry: SweepGeometry, radiusM: number): Int32Array {
  const { gateCount, azimuthDeg, site } = geometry;
  const { arcM } = gateGeometry(geometry, geometry.elevationDeg, radiusM);
  const lastM = arcM[gateCount - 1];
  const nodeCount = Math.max(2, Math.ceil(lastM / NODE_SPACING_M) + 1);
  const spacingM = lastM / (nodeCount - 1);
  const nodeX = new Float64Array(nodeCount);
  const nodeY = new Float64Array(nodeCount);
  const cellOfGate = new Int32Array(azimuthDeg.length * gateCount);
  for (let ray = 0; ray < azimuthDeg.length; ray++) {
    for (let node = 0; node < nodeCount; node++) {
      const { lonDeg, latDeg } = geodesicDirect(site, azimuthDeg[ray], node * spacingM);
      [nodeX[node], nodeY[node]] = map.forward(lonDeg, latDeg);
    }
    for (let gate = 0; gate < gateCount; gate++) {
      const along = arcM[gate] / spacingM;
      const node = Math.min(Math.floor(along), nodeCount - 2);
      const u = along - node;
      const x = nodeX[node] + u * (nodeX[node + 1] - nodeX[node]);
      const y = nodeY[node] + u * (nodeY[node + 1] - nodeY[node]);
      cellOfGate[ray * gateCount + gate] = cellIndexAt(grid, x, y);
    }
  }
  return cellOfGate;
}

/** Index of the ray nearest to an azimuth, and how far off it is. Azimuths ascend and wrap. */
function nearestRay(azimuths: Float64Array, azimuthDeg: number): { ray: number; offDeg: number } {
  let low = 0;
  let high = azimuths.length;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (azimuths[middle] < azimuthDeg) low = middle + 1;
    else high = middle;
  }
  const after = low % azimuths.length;
  const before = (low + azimuths.length - 1) % azimuths.length;
  const distance = (ray: number) => Math.abs(((azimuths[ray] - azimuthDeg + 540) % 360) - 180);
  return distance(after) <= distance(before)
    ? { ray: after, offDeg: distance(after) }
    : { ray: before, offDeg: distance(before) };
}

/**
 * Mean spacing of rays, the widest opening between two of them left out: a sweep over a sector, or one that
 * broke off, must not speak for what it never looked at.
 *
 * @returns 0 for a single ray
 */
function raySpacingDeg(azimuths: Float64Array): number {
  const count = azimuths.length;
  if (count < 2) return 0;
  let widest = azimuths[0] + 360 - azimuths[count - 1];
  for (let ray = 1; ray < count; ray++) widest = Math.max(widest, azimuths[ray] - azimuths[ray - 1]);
  return (360 - widest) / (count - 1);
}

/**
 * Builds the lookup of a sweep geometry on a grid, once per geometry.
 *
 * A cell is made of the gates whose centre lies in it. Where none does (far out, where rays are wider
 * than cells), it is made of the nearest gate, provided the cell centre lies within half a gate and
 * half a beam of it; rays spaced wider than the beam count by their spacing, or stripes would open
 * between them.
 */
export function polarLookup(
  grid: Grid,
  map: Projection,
  fromSite: SiteCells,
  geometry: SweepGeometry,
  rules: LookupRules,
): PolarLookup {
  const cellCount = grid.nx * grid.ny;
  const { gateCount, elevationDeg, firstGateCentreM, gateLengthM } = geometry;
  const radiusM = effectiveRadiusM(rules.effectiveRadiusFactor);
  const lastEdgeM = firstGateCentreM + (gateCount - 0.5) * gateLengthM;
  const reachM = arcDistanceM(lastEdgeM, elevationDeg, radiusM);
  const sectors = rules.blockedSectors.filter((sector) => elevationDeg <= sector.upToElevationDeg);

  // May the sweep speak for the cell? Height above the antenna, or NaN.
  const heightM = new Float32Array(cellCount).fill(Number.NaN);
  const slantM = new Float32Array(cellCount);
  for (let cell = 0; cell < cellCount; cell++) {
    const distanceM = fromSite.distanceM[cell];
    // A cell whose centre lies just beyond the last gate may still hold the centres of some.
    if (distanceM > reachM + grid.cellM) continue;
    const beam = beamAboveArc(distanceM, elevationDeg, radiusM);
    if (!(beam.heightM <= rules.maxBeamHeightM)) continue;
    slantM[cell] = beam.slantRangeM;
    if (sectors.some((sector) => inSector(fromSite.azimuthDeg[cell], sector))) continue;
    heightM[cell] = beam.heightM;
  }
  const coverageM = coverageOf(elevationDeg, radiusM, rules.maxBeamHeightM, reachM);

  const cellOfGate = cellsOfGates(grid, map, geometry, radiusM);
  const gatesInCell = new Int32Array(cellCount);
  for (const cell of cellOfGate) if (cell >= 0 && !Number.isNaN(heightM[cell])) gatesInCell[cell]++;

  const halfWidthDeg = Math.max(geometry.beamWidthDeg, raySpacingDeg(geometry.azimuthDeg)) / 2;
  const nearestGate = new Map<number, number>();
  for (let cell = 0; cell < cellCount; cell++) {
    if (Number.isNaN(heightM[cell]) || gatesInCell[cell] > 0) continue;
    const along = (slantM[cell] - firstGateCentreM) / gateLengthM;
    const gate = Math.round(along);
    if (gate < 0 || gate >= gateCount || Math.abs(along - gate) > 0.5 + 1e-6) continue;
    const { ray, offDeg } = nearestRay(geometry.azimuthDeg, fromSite.azimuthDeg[cell]);
    if (offDeg > halfWidthDeg + 1e-4) continue;
    nearestGate.set(cell, ray * gateCount + gate);
    gatesInCell[cell] = 1;
  }

  const position = new Int32Array(cellCount).fill(-1);
  let covered = 0;
  let gateTotal = 0;
  for (let cell = 0; cell < cellCount; cell++) {
    if (gatesInCell[cell] === 0) continue;
    position[cell] = covered++;
    gateTotal += gatesInCell[cell];
  }
  const cells = new Int32Array(covered);
  const start = new Int32Array(covered + 1);
  const gates = new Int32Array(gateTotal);
  const beamHeightAslM = new Float32Array(cellCount).fill(Number.NaN);
  const weight = new Float32Array(cellCount);
  for (let cell = 0; cell < cellCount; cell++) {
    const at = position[cell];
    if (at < 0) continue;
    cells[at] = cell;
    start[at + 1] = start[at] + gatesInCell[cell];
    beamHeightAslM[cell] = geometry.site.antennaHeightM + heightM[cell];
    weight[cell] = blendWeight({
      beamHeightM: heightM[cell],
      groundDistanceM: fromSite.distanceM[cell],
      coverageM,
      taperM: rules.taperM,
    });
  }
  const next = start.slice(0, covered);
  for (let gate = 0; gate < cellOfGate.length; gate++) {
    const at = cellOfGate[gate] < 0 ? -1 : position[cellOfGate[gate]];
    if (at >= 0) gates[next[at]++] = gate;
  }
  for (const [cell, gate] of nearestGate) gates[start[position[cell]]] = gate;
  return { cells, start, gates, position, beamHeightAslM, weight, coverageM };
}

/** Ground distance at which a beam reaches a height, at most `reachM`: bisection, since height rises with distance. */
function coverageOf(elevationDeg: number, radiusM: number, heightLimitM: number, reachM: number): number {
  const heightAt = (arcM: number) => beamAboveArc(arcM, elevationDeg, radiusM).heightM;
  if (heightAt(reachM) <= heightLimitM) return reachM;
  let [low, high] = [0, reachM];
  for (let step = 0; step < 50; step++) {
    const middle = (low + high) / 2;
    if (heightAt(middle) <= heightLimitM) low = middle;
    else high = middle;
  }
  return low;
}
