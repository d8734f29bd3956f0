import type { Plane } from "./earth.ts";

/** An invented catchment: rings in km of a district 160 km wide, the outer one first, then holes. */
interface CatchmentPlan {
  readonly id: string;
  readonly name: string;
  readonly rings: readonly (readonly (readonly [number, number])[])[];
}

const PLANS: readonly CatchmentPlan[] = [
  {
    id: "SM-01",
    name: "Upper Sallow",
    rings: [
      [
        [-42, 8],
        [-14, 10],
        [-10, 36],
        [-38, 38],
      ],
    ],
  },
  {
    id: "SM-02",
    name: "Withy Carr (concave)",
    rings: [
      [
        [-10, 6],
        [18, 6],
        [18, 18],
        [4, 18],
        [4, 36],
        [-10, 36],
      ],
    ],
  },
  {
    id: "SM-03",
    name: "Nethermere (with a lake left out)",
    rings: [
      [
        [-40, -32],
        [-8, -34],
        [-6, 4],
        [-38, 6],
      ],
      [
        [-26, -18],
        [-20, -18],
        [-20, -10],
        [-26, -10],
      ],
    ],
  },
  {
    id: "SM-04",
    name: "Glasswater",
    rings: [
      [
        [-4, -36],
        [26, -38],
        [28, -6],
        [-2, 0],
      ],
    ],
  },
  {
    id: "SM-05",
    name: "Long Reach",
    rings: [
      [
        [22, 0],
        [44, -10],
        [46, 30],
        [24, 34],
      ],
    ],
  },
];

/** A catchment in the plane: rings of [xKm, yKm], first equal to last. */
export interface PlaneCatchment {
  readonly id: string;
  readonly name: string;
  readonly rings: readonly (readonly (readonly [number, number])[])[];
}

/** The five catchments of a district of a given size, with edges bent as water bends them. */
export function planeCatchments(sizeKm: number): PlaneCatchment[] {
  return PLANS.map(({ id, name, rings }) => ({
    id,
    name,
    rings: rings.map((ring) => densify(ring).map(([x, y]) => bend(x, y, sizeKm / 160))),
  }));
}

function densify(ring: readonly (readonly [number, number])[]): [number, number][] {
  const points: [number, number][] = [];
  ring.forEach(([x, y], i) => {
    const [nextX, nextY] = ring[(i + 1) % ring.length]!;
    const pieces = Math.ceil(Math.hypot(nextX - x, nextY - y) / 2);
    for (let piece = 0; piece < pieces; piece++) {
      points.push([x + ((nextX - x) * piece) / pieces, y + ((nextY - y) * piece) / pieces]);
    }
  });
  points.push(points[0]!);
  return points;
}

/** One smooth bend of the whole plane: it never folds, so rings stay simple and shared edges stay shared. */
function bend(x: number, y: number, scale: number): [number, number] {
  return [scale * (x + 1.6 * Math.sin(y / 6.5)), scale * (y + 1.6 * Math.sin(x / 5.5))];
}

/** Whether a point lies in a catchment: even number of crossings means outside. */
export function holds(catchment: PlaneCatchment, xKm: number, yKm: number): boolean {
  let inside = false;
  for (const ring of catchment.rings) {
    for (let i = 1; i < ring.length; i++) {
      const [x1, y1] = ring[i - 1]!;
      const [x2, y2] = ring[i]!;
      if (y1 > yKm !== y2 > yKm && xKm < x1 + ((yKm - y1) / (y2 - y1)) * (x2 - x1)) inside = !inside;
    }
  }
  return inside;
}

/** The catchments as GeoJSON (RFC 7946): WGS 84, outer rings anticlockwise, holes clockwise. */
export function catchmentsGeoJson(catchments: readonly PlaneCatchment[], plane: Plane): string {
  const features = catchments.map(({ id, name, rings }) => ({
    type: "Feature",
    properties: { id, name, note: "invented" },
    geometry: {
      type: "Polygon",
      coordinates: rings.map((ring, i) => {
        const places = ring.map(([x, y]) => {
          const { lonDeg, latDeg } = plane.toPlace(x, y);
          return [round6(lonDeg), round6(latDeg)];
        });
        return i === 0 ? places : places.reverse();
      }),
    },
  }));
  return `${JSON.stringify({ type: "FeatureCollection", name: "Saltermoor catchments (invented)", features })}\n`;
}

function round6(value: number): number {
  return Math.round(value * 1e6) / 1e6;
}
