import { InputError, type Moment, type Notice, type Sweep, type SweepHeader } from "@rainreckon/core";
import type { ScanFile } from "./scan-file.ts";
import { takeRows } from "./take-rows.ts";

/** Where, how high and when the rays of a sweep looked, in the order of the file. NaN is unknown. */
export interface RayTable {
  readonly azimuthDeg: Float64Array;
  readonly elevationDeg: Float64Array;
  readonly timeEpochMs: Float64Array;
}

/** One sweep of a file, ready to be read in parts. */
export interface SweepSource {
  readonly header: SweepHeader;
  rays(): RayTable;
  /** Whether a moment can be read, without decoding it. @throws InputError where it cannot */
  check(quantity: string): void;
  /** A moment with its rays in the order of the file. @throws InputError where it cannot be read */
  moment(quantity: string): Moment;
}

/** A scan file made of such sweeps: it sorts rays by azimuth and keeps moments in step with them. */
export function sourcedScan(
  path: string,
  format: string,
  sweeps: readonly SweepSource[],
  notes: { readonly remarks: readonly Notice[]; readonly leftOut: readonly InputError[] },
  close: () => void,
): ScanFile {
  let open = true;
  return {
    format,
    headers: sweeps.map(({ header }) => header),
    remarks: notes.remarks,
    leftOut: notes.leftOut,
    inspect: () => sweeps.flatMap(faultsOf),
    readSweep(index, quantities) {
      if (!open) throw new RangeError(`${path} is closed already`);
      const source = sweeps[index];
      if (source === undefined) {
        throw new RangeError(`there is no sweep ${index}; ${path} has ${sweeps.length}`);
      }
      return readSweep(source, quantities ?? source.header.quantities);
    },
    close() {
      if (open) close();
      open = false;
    },
  };
}

function faultsOf(source: SweepSource): InputError[] {
  return source.header.quantities.flatMap((quantity) => {
    try {
      source.check(quantity);
      return [];
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      return [error];
    }
  });
}

function readSweep(source: SweepSource, quantities: readonly string[]): Sweep {
  const { header } = source;
  for (const quantity of quantities) mustHave(header, quantity);
  const rays = source.rays();
  const { rows, remarks } = rowsByAzimuth(rays, header.rayCount);
  if (rows.length === 0) {
    throw new InputError(
      "no ray of the sweep has an azimuth, an elevation and a time",
      `${header.origin.path}, ${header.origin.dataset}`,
      "fetch the file again, or leave it out",
    );
  }
  const ordered = rows.every((row, ray) => row === ray) && rows.length === header.rayCount;
  const moments = new Map<string, Moment>();
  for (const quantity of quantities) {
    const moment = source.moment(quantity);
    const stored = ordered ? moment.stored : takeRows(moment.stored, rows, header.gateCount);
    moments.set(quantity, { ...moment, stored });
  }
  return {
    ...header,
    rayCount: rows.length,
    remarks: [...header.remarks, ...remarks],
    azimuthDeg: Float64Array.from(rows, (row) => turned(rays.azimuthDeg[row] as number)),
    rayElevationDeg: Float64Array.from(rows, (row) => rays.elevationDeg[row] as number),
    rayTimeEpochMs: Float64Array.from(rows, (row) => rays.timeEpochMs[row] as number),
    rayTimesDerived: false,
    raysReordered: movedRays(rows),
    moments,
  };
}

function mustHave({ quantities, origin }: SweepHeader, quantity: string): void {
  if (quantities.includes(quantity)) return;
  throw new InputError(
    `the sweep has no ${quantity}; it offers ${quantities.join(", ")}`,
    `${origin.path}, ${origin.dataset}`,
    "name one of these as the moment of this radar, or leave the file out",
  );
}

function rowsByAzimuth(rays: RayTable, rayCount: number): { rows: Int32Array; remarks: string[] } {
  const { azimuthDeg, elevationDeg, timeEpochMs } = rays;
  const rows: number[] = [];
  for (let row = 0; row < rayCount; row++) {
    const azimuth = azimuthDeg[row] as number;
    const elevation = elevationDeg[row] as number;
    const known = azimuth >= -360 && azimuth <= 720 && elevation >= -10 && elevation <= 90;
    if (known && Number.isFinite(timeEpochMs[row])) rows.push(row);
  }
  const lost = rayCount - rows.length;
  // Rays at the same azimuth keep the order of the file.
  rows.sort((a, b) => turned(azimuthDeg[a] as number) - turned(azimuthDeg[b] as number) || a - b);
  return {
    rows: Int32Array.from(rows),
    remarks:
      lost > 0 ? [`${lost} rays have no azimuth, elevation or time that can be, and are left out.`] : [],
  };
}

function movedRays(rows: Int32Array): number {
  const inFile = rows.toSorted((a, b) => a - b);
  return rows.reduce((count, row, place) => count + (row === inFile[place] ? 0 : 1), 0);
}

/** The same direction within 0 ≤ azimuth < 360. */
function turned(angleDeg: number): number {
  const turn = ((angleDeg % 360) + 360) % 360;
  // A tiny negative angle comes out of the sum as 360 itself.
  return turn === 360 ? 0 : turn;
}
