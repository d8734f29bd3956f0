/** Most pairs of edges that are compared before a ring counts as too intricate to check. */
const MAX_COMPARISONS = 300_000_000;

type Position = readonly [number, number];

/**
 * Where a ring crosses itself, or runs along itself in the same place; undefined where it does not.
 *
 * A ring that only touches itself in a point is fine: it bounds a definite area. Edges are sorted along the
 * axis in which they are the shorter, compared only where their boxes meet.
 *
 * @param ring - first position equal to the last
 * @param maxComparisons - pairs of edges after which the comparison is given up
 * @returns a position on the fault; or "too-intricate" where the comparison was given up
 */
export function ringCrossing(
  ring: readonly Position[],
  maxComparisons = MAX_COMPARISONS,
): Position | "too-intricate" | undefined {
  const points = withoutRepeats(ring);
  const count = points.length;
  if (count < 3) return undefined;
  const axis = sweepAxis(points);
  const other = 1 - axis;
  const low = new Float64Array(count);
  const high = new Float64Array(count);
  for (let edge = 0; edge < count; edge++) {
    const from = points[edge][axis];
    const to = points[(edge + 1) % count][axis];
    low[edge] = Math.min(from, to);
    high[edge] = Math.max(from, to);
  }
  const order = Uint32Array.from(low, (_, edge) => edge).sort((a, b) => low[a] - low[b]);
  let comparisons = 0;
  for (let first = 0; first < count; first++) {
    const a = order[first];
    const a0 = points[a];
    const a1 = points[(a + 1) % count];
    const aLow = Math.min(a0[other], a1[other]);
    const aHigh = Math.max(a0[other], a1[other]);
    for (let second = first + 1; second < count && low[order[second]] <= high[a]; second++) {
      comparisons += 1;
      if (comparisons > maxComparisons) return "too-intricate";
      const b = order[second];
      const b0 = points[b];
      const b1 = points[(b + 1) % count];
      if (Math.max(b0[other], b1[other]) < aLow || Math.min(b0[other], b1[other]) > aHigh) continue;
      const fault = crossing(points, a, b);
      if (fault !== undefined) return fault;
    }
  }
  return undefined;
}

function withoutRepeats(ring: readonly Position[]): Position[] {
  const points: Position[] = [];
  for (let index = 0; index + 1 < ring.length; index++) {
    const last = points[points.length - 1];
    const point = ring[index];
    if (last === undefined || last[0] !== point[0] || last[1] !== point[1]) points.push(point);
  }
  const first = points[0];
  const last = points[points.length - 1];
  if (points.length > 1 && first[0] === last[0] && first[1] === last[1]) points.pop();
  return points;
}

/** The axis along which the edges reach over the smaller share of the ring's extent. */
function sweepAxis(points: readonly Position[]): 0 | 1 {
  const reach = [0, 1].map((axis) => {
    let least = Number.POSITIVE_INFINITY;
    let most = Number.NEGATIVE_INFINITY;
    let sum = 0;
    for (let index = 0; index < points.length; index++) {
      const value = points[index][axis];
      least = Math.min(least, value);
      most = Math.max(most, value);
      sum += Math.abs(points[(index + 1) % points.length][axis] - value);
    }
    return sum / (most - least || Number.MIN_VALUE);
  });
  return reach[0] <= reach[1] ? 0 : 1;
}

function crossing(points: readonly Position[], a: number, b: number): Position | undefined {
  const count = points.length;
  const a0 = points[a];
  const a1 = points[(a + 1) % count];
  const b0 = points[b];
  const b1 = points[(b + 1) % count];
  const neighbours = (a + 1) % count === b || (b + 1) % count === a;
  const sideOfB0 = side(a0, a1, b0);
  const sideOfB1 = side(a0, a1, b1);
  if (sideOfB0 === 0 && sideOfB1 === 0) return neighbours ? undefined : overlap(a0, a1, b0, b1);
  if (neighbours) return undefined;
  const sideOfA0 = side(b0, b1, a0);
  const sideOfA1 = side(b0, b1, a1);
  if (sideOfA0 * sideOfA1 < 0 && sideOfB0 * sideOfB1 < 0) {
    const share = sideOfA0 / (sideOfA0 - sideOfA1);
    return [a0[0] + share * (a1[0] - a0[0]), a0[1] + share * (a1[1] - a0[1])];
  }
  // An end of one edge on the other: does the ring pass through to the other side there, or only touch?
  if (sideOfB0 === 0 && within(a0, a1, b0)) return passesThrough(points, b, a) ? b0 : undefined;
  if (sideOfA0 === 0 && within(b0, b1, a0)) return passesThrough(points, a, b) ? a0 : undefined;
  return undefined;
}

/** Whether the ring, at vertex `vertex`, goes from one side of the ring's path along `edge` to the other. */
function passesThrough(points: readonly Position[], vertex: number, edge: number): boolean {
  const count = points.length;
  const at = points[vertex];
  const previous = points[(vertex + count - 1) % count];
  const next = points[(vertex + 1) % count];
  let from = points[edge];
  let to = points[(edge + 1) % count];
  // Where the edge begins or ends at the vertex, its path goes on along the neighbouring edge.
  if (same(from, at)) from = points[(edge + count - 1) % count];
  else if (same(to, at)) to = points[(edge + 2) % count];
  const start = direction(at, from);
  const end = turn(start, direction(at, to));
  const first = turn(start, direction(at, previous));
  const second = turn(start, direction(at, next));
  const onPath = (angle: number) => angle === 0 || angle === end;
  if (onPath(first) || onPath(second)) return false;
  return first < end !== second < end;
}

function overlap(a0: Position, a1: Position, b0: Position, b1: Position): Position | undefined {
  const axis = Math.abs(a1[0] - a0[0]) >= Math.abs(a1[1] - a0[1]) ? 0 : 1;
  const from = Math.max(Math.min(a0[axis], a1[axis]), Math.min(b0[axis], b1[axis]));
  const to = Math.min(Math.max(a0[axis], a1[axis]), Math.max(b0[axis], b1[axis]));
  if (!(to > from)) return undefined;
  return [a0, a1, b0, b1].find((point) => point[axis] === from);
}

/** Above 0 where c lies to the left of the line from a to b, 0 on it. */
function side(a: Position, b: Position, c: Position): number {
  return (b[0] - a[0]) * (c[1] - a[1]) - (b[1] - a[1]) * (c[0] - a[0]);
}

function within(a: Position, b: Position, point: Position): boolean {
  return (
    Math.min(a[0], b[0]) <= point[0] &&
    point[0] <= Math.max(a[0], b[0]) &&
    Math.min(a[1], b[1]) <= point[1] &&
    point[1] <= Math.max(a[1], b[1])
  );
}

function direction(from: Position, to: Position): number {
  return Math.atan2(to[1] - from[1], to[0] - from[0]);
}

function turn(from: number, to: number): number {
  const angle = to - from;
  return angle < 0 ? angle + 2 * Math.PI : angle;
}

function same(a: Position, b: Position): boolean {
  return a[0] === b[0] && a[1] === b[1];
}
