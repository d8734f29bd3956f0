/** What an ODIM file says of the rays of a sweep, ray by ray in the order of the file. */
export interface StoredRays {
  readonly rayCount: number;
  readonly elevationDeg: number;
  readonly startEpochMs: number;
  readonly endEpochMs: number;
  /** Index of the ray that was measured first (a1gate). */
  readonly firstRay: number;
  readonly clockwise: boolean;
  /** Azimuth at which ray 0 begins where azimuths are not given one by one (astart). */
  readonly originDeg: number;
  /** Edges of the rays (startazA, stopazA), degrees. */
  readonly startAzimuthDeg?: Float64Array;
  readonly stopAzimuthDeg?: Float64Array;
  /** Elevation ray by ray (elangles), degrees. */
  readonly rayElevationDeg?: Float64Array;
  /** Times at the edges of the rays (startazT, stopazT), seconds since 1970. */
  readonly startTimeS?: Float64Array;
  readonly stopTimeS?: Float64Array;
}

/** Rays in ascending azimuth. */
export interface SortedRays {
  /** Shape [n], n ≤ rayCount: a ray whose azimuth is unknown has no place and is left out. */
  readonly azimuthDeg: Float64Array;
  readonly rayElevationDeg: Float64Array;
  readonly rayTimeEpochMs: Float64Array;
  readonly rayTimesDerived: boolean;
  /** Shape [n]: row of the file that each ray comes from; undefined where the file's order stands. */
  readonly fileRow?: Int32Array;
  /** Rays that do not stand where the file has them. */
  readonly raysReordered: number;
  readonly remarks: readonly string[];
}

/** Ray times may lie a little outside the sweep's own start and end, which are whole seconds. */
const TIME_SLACK_MS = 60_000;

/**
 * Works out where, how high and when each ray looked, and sorts by azimuth.
 *
 * Azimuths are the middle between the edges given, also over north; else rays are spread evenly, the first
 * beginning at `originDeg`. Times are the middle between those given; else they run evenly from start to end,
 * beginning with `firstRay` and in the antenna's sense of turning.
 *
 * @see ODIM_H5 2.3, EUMETNET OPERA (2019), tables of the attributes of "where" and "how" for polar data
 */
export function sortRays(stored: StoredRays): SortedRays {
  const remarks: string[] = [];
  const azimuths = azimuthsOf(stored, remarks);
  const times = timesOf(stored, remarks);
  const elevations = elevationsOf(stored, remarks);

  const placed = rowsWithAzimuth(azimuths);
  const lost = stored.rayCount - placed.length;
  if (lost > 0) remarks.push(`${lost} rays have no azimuth and are left out.`);
  // Rays at the same azimuth keep the order of the file.
  const rows = placed.toSorted((a, b) => azimuths[a] - azimuths[b] || a - b);
  const raysReordered = rows.reduce((count, row, place) => count + (row === placed[place] ? 0 : 1), 0);
  return {
    azimuthDeg: Float64Array.from(rows, (row) => azimuths[row]),
    rayElevationDeg: Float64Array.from(rows, (row) => elevations[row]),
    rayTimeEpochMs: Float64Array.from(rows, (row) => times.epochMs[row]),
    rayTimesDerived: times.derived,
    ...(raysReordered > 0 || lost > 0 ? { fileRow: rows } : {}),
    raysReordered,
    remarks,
  };
}

function azimuthsOf(stored: StoredRays, remarks: string[]): Float64Array {
  const { rayCount, startAzimuthDeg: starts, stopAzimuthDeg: stops } = stored;
  const widthDeg = 360 / rayCount;
  if (starts !== undefined) {
    const known = starts.length === rayCount && starts.some(isAzimuth);
    if (known) {
      const hasStops = stops?.length === rayCount;
      if (!hasStops) remarks.push("Rays carry no end azimuth; each is taken to be as wide as the others.");
      const half = stored.clockwise ? widthDeg / 2 : -widthDeg / 2;
      return Float64Array.from(starts, (start, ray) => {
        if (!isAzimuth(start)) return Number.NaN;
        if (!hasStops) return turned(start + half);
        return isAzimuth(stops[ray]) ? turned(start + shortestTurn(start, stops[ray]) / 2) : Number.NaN;
      });
    }
    remarks.push("The azimuths given do not fit the rays; the rays are spread evenly instead.");
  }
  return Float64Array.from({ length: rayCount }, (_, ray) =>
    turned(stored.originDeg + (ray + 0.5) * widthDeg),
  );
}

function elevationsOf(stored: StoredRays, remarks: string[]): Float64Array {
  const { rayCount, elevationDeg, rayElevationDeg: given } = stored;
  if (given !== undefined) {
    if (given.length === rayCount && given.every((angle) => angle >= -10 && angle <= 90)) return given;
    remarks.push("The elevations given ray by ray cannot be used; the sweep's own stands for them.");
  }
  return new Float64Array(rayCount).fill(elevationDeg);
}

function timesOf(stored: StoredRays, remarks: string[]): { epochMs: Float64Array; derived: boolean } {
  const { rayCount, startEpochMs, endEpochMs, startTimeS: starts, stopTimeS: stops } = stored;
  const stepMs = (endEpochMs - startEpochMs) / rayCount;
  if (starts !== undefined) {
    const hasStops = stops?.length === rayCount;
    const epochMs = Float64Array.from(starts, (start, ray) =>
      hasStops ? ((start + stops[ray]) / 2) * 1000 : start * 1000 + stepMs / 2,
    );
    const plausible = (time: number) =>
      time >= startEpochMs - TIME_SLACK_MS && time <= endEpochMs + TIME_SLACK_MS;
    if (epochMs.length === rayCount && epochMs.every(plausible)) return { epochMs, derived: false };
    remarks.push("The ray times given do not fit the sweep; they are derived from its start and end.");
  }
  const sense = stored.clockwise ? 1 : -1;
  const epochMs = Float64Array.from({ length: rayCount }, (_, ray) => {
    const turn = (sense * (ray - stored.firstRay) + rayCount) % rayCount;
    return startEpochMs + (turn + 0.5) * stepMs;
  });
  return { epochMs, derived: true };
}

function rowsWithAzimuth(azimuths: Float64Array): Int32Array {
  const rows: number[] = [];
  for (let row = 0; row < azimuths.length; row++) if (!Number.isNaN(azimuths[row])) rows.push(row);
  return Int32Array.from(rows);
}

function isAzimuth(angle: number): boolean {
  return angle >= -360 && angle <= 720;
}

/** Shortest way from one azimuth to another, over north where that is nearer: above -180 up to 180 degrees. */
function shortestTurn(fromDeg: number, toDeg: number): number {
  const turn = turned(toDeg - fromDeg);
  return turn > 180 ? turn - 360 : turn;
}

/** The same direction within 0 ≤ azimuth < 360. */
function turned(angleDeg: number): number {
  return ((angleDeg % 360) + 360) % 360;
}
