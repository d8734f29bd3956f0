import type { Grid, Ring, Score } from "@rainreckon/core";
import {
  type FrameSeries,
  FrameStack,
  type GaugeRole,
  type GeographicLattice,
  type Hyetograph,
  type MapLayer,
  type ReportCatchment,
  type ReportGauge,
  type ReportInput,
  type ReportScore,
} from "../src/index.ts";

// Everything here is invented: the district, its rain, its gauges, and the scores, which are plausible
// numbers and were not worked out from one another.

const grid: Grid = {
  crs: "+proj=laea +lat_0=52 +lon_0=5 +datum=WGS84",
  westM: -60_000,
  northM: 45_000,
  cellM: 1000,
  nx: 120,
  ny: 90,
};
const startEpochMs = Date.UTC(2031, 4, 3, 12);
const endEpochMs = Date.UTC(2031, 4, 3, 18);
const radars = [
  { id: "inv-moor", name: "Moor Top", xM: -38_000, yM: 12_000 },
  { id: "inv-quay", name: "Quay Head", xM: 41_000, yM: -22_000 },
];

/** A made-up bump of rain: depth in the middle, and its spread east and north in km. */
function bump(
  xKm: number,
  yKm: number,
  x0: number,
  y0: number,
  depth: number,
  sx: number,
  sy: number,
): number {
  const turnedX = (xKm - x0) * 0.8 + (yKm - y0) * 0.6;
  const turnedY = -(xKm - x0) * 0.6 + (yKm - y0) * 0.8;
  return depth * Math.exp(-0.5 * ((turnedX / sx) ** 2 + (turnedY / sy) ** 2));
}

/** The invented rain of the window at a place, mm. */
export function inventedDepthMm(xM: number, yM: number): number {
  const [x, y] = [xM / 1000, yM / 1000];
  const depth = bump(x, y, 8, 4, 46, 26, 7) + bump(x, y, -22, -14, 22, 14, 9) + bump(x, y, 31, 22, 17, 9, 5);
  return depth < 0.4 ? 0 : depth;
}

function field(valueAt: (xM: number, yM: number) => number): Float32Array {
  return Float32Array.from({ length: grid.nx * grid.ny }, (_, i) =>
    valueAt(
      grid.westM + ((i % grid.nx) + 0.5) * grid.cellM,
      grid.northM - (Math.floor(i / grid.nx) + 0.5) * grid.cellM,
    ),
  );
}

function rangeM(radar: number, xM: number, yM: number): number {
  return Math.hypot(xM - radars[radar].xM, yM - radars[radar].yM);
}

const nearest = (xM: number, yM: number) => (rangeM(0, xM, yM) <= rangeM(1, xM, yM) ? 0 : 1);
const nearestM = (xM: number, yM: number) => Math.min(rangeM(0, xM, yM), rangeM(1, xM, yM));
/** A sector behind an invented hill, and what lies too far out, is not observed. */
const isSeen = (xM: number, yM: number) =>
  nearestM(xM, yM) < 62_000 && !(yM > 26_000 && xM > -46_000 && xM < -30_000);

function layers(): MapLayer[] {
  const seen = (value: (xM: number, yM: number) => number) => (xM: number, yM: number) =>
    isSeen(xM, yM) ? value(xM, yM) : Number.NaN;
  return [
    {
      quantity: "depthMm",
      id: "radar",
      label: "Radar total",
      what: "Depth over the window from radar alone, over the part of it that was observed.",
      values: field(seen((x, y) => inventedDepthMm(x, y) * 0.85)),
    },
    {
      quantity: "depthMm",
      id: "adjusted",
      label: "Adjusted total",
      what: "The radar total multiplied by the gauge/radar factor.",
      values: field(seen(inventedDepthMm)),
    },
    {
      quantity: "fraction",
      id: "observed",
      label: "Observed share",
      what: "Share of the window in which a radar could see rain here.",
      values: field(seen((x, y) => 1 - Math.max(0, (nearestM(x, y) - 42_000) / 30_000))),
    },
    {
      quantity: "heightM",
      id: "beam",
      label: "Beam height",
      what: "Height of the beam centre above mean sea level, weighted by time.",
      values: field(seen((x, y) => 180 + nearestM(x, y) * 0.011 + (nearestM(x, y) / 1000) ** 2 * 0.06)),
    },
    {
      quantity: "radarIndex",
      id: "who",
      label: "Who spoke",
      what: "The radar that carries most of the weight in each cell.",
      values: field(seen(nearest)),
    },
    {
      quantity: "depthMm",
      scale: "error",
      group: "How sure",
      id: "error",
      label: "Standard error",
      what: "Standard error of the adjusted total.",
      values: field(seen((x, y) => 1 + inventedDepthMm(x, y) * 0.12)),
    },
    {
      quantity: "share",
      group: "Time",
      id: "bridged",
      label: "Bridged",
      what: "Share of the window between scans far apart, bridged all the same.",
      values: field(seen((x, y) => Math.max(0, (nearestM(x, y) - 30_000) / 300_000))),
    },
    {
      quantity: "decibel",
      group: "What was corrected",
      id: "profile",
      label: "Vertical profile",
      what: "Decibels added to bring echo aloft to the ground, mean by depth.",
      values: field(seen((x, y) => (nearestM(x, y) - 35_000) / 9000)),
    },
    {
      quantity: "depthMm",
      scale: "own",
      group: "What was screened",
      id: "static",
      label: "Static echo",
      what: "Depth that echo taken out as static would have made.",
      values: field((x, y) => (rangeM(0, x, y) < 6000 ? 9 : 0)),
    },
  ];
}

/** Shares of the six hours in the depth of a place: the rain drifts east. */
function hourShare(hour: number, xM: number): number {
  const weights = Array.from({ length: 6 }, (_, k) => Math.exp(-0.5 * (k - 2.5 - xM / 40_000) ** 2));
  return weights[hour] / weights.reduce((sum, weight) => sum + weight, 0);
}

function frames(): FrameSeries[] {
  const hour = (endEpochMs - startEpochMs) / 6;
  return [
    { layerId: "adjusted", times: 1 },
    { layerId: "radar", times: 0.85 },
  ].map(({ layerId, times }) => {
    const stack = new FrameStack(layerId, grid, 6);
    for (let k = 0; k < 6; k += 1) {
      const interval = { startEpochMs: startEpochMs + k * hour, endEpochMs: startEpochMs + (k + 1) * hour };
      const depthMm = field((x, y) =>
        isSeen(x, y) ? times * inventedDepthMm(x, y) * hourShare(k, x) : Number.NaN,
      );
      stack.add(interval, depthMm);
    }
    return stack.finish();
  });
}

/** Corners of a grid that is taken to lie on a plane of degrees: good enough for an invented district. */
function lattice(): GeographicLattice {
  const corners = [0, 1, 2, 3, 4];
  return {
    across: 4,
    down: 4,
    lonDeg: corners.flatMap(() => corners.map((k) => 5 - 0.87 + 0.4375 * k)),
    latDeg: corners.flatMap((k) => corners.map(() => 52.4 - 0.2025 * k)),
  };
}

const STUCK = 4;
const ODD_UNIT = 19;

const GAUGE_NAMES = [
  "Alder Weir",
  "Brook End",
  "Chalk Pit",
  "Drain 9",
  "East Fen",
  "Ford Lane",
  "Gorse Hill",
  "Holm",
];

function gauges(): ReportGauge[] {
  return Array.from({ length: 25 }, (_, i) => {
    const xM = -52_000 + ((i * 37) % 104) * 1000 + 500;
    const yM = 34_000 - ((i * 23) % 68) * 1000 - 500;
    const truthMm = inventedDepthMm(xM, yM);
    const isStuck = i === STUCK;
    const isUnseen = !isSeen(xM, yM);
    const role: GaugeRole =
      isStuck || i === ODD_UNIT ? "doubted" : isUnseen || i === 17 ? "left-out" : "used";
    const gaugeMm = isStuck ? 0 : truthMm * (1 + 0.22 * Math.sin(i * 2.3)) * (i === ODD_UNIT ? 2.54 : 1);
    return {
      network: i < 15 ? "River board" : "City drains",
      id: i < 15 ? `R${String(i + 1).padStart(2, "0")}` : `0${i}`,
      ...(i < GAUGE_NAMES.length ? { name: GAUGE_NAMES[i] } : {}),
      xM,
      yM,
      role,
      gaugeMm,
      radarMm: isUnseen ? Number.NaN : truthMm * 0.85,
      crossValidatedMm: isUnseen ? Number.NaN : truthMm * (1 + 0.01 * Math.cos(i)),
      commonFraction: isUnseen ? 0 : 0.97,
      ...(isUnseen
        ? { reason: "radar did not observe this place" }
        : { radarId: radars[nearest(xM, yM)].id, rangeKm: nearestM(xM, yM) / 1000 }),
      verdict: isStuck || i === ODD_UNIT ? "leave out" : "use",
      cause: isStuck
        ? "silent gauge"
        : i === ODD_UNIT
          ? "unit looks wrong"
          : i === 17
            ? "left out in the plan"
            : "",
      evidence: isStuck
        ? `0.0 mm while its radar cell has ${(truthMm * 0.85).toFixed(1)} mm and 6 gauges around it lie within a factor of 1.3 of radar`
        : i === ODD_UNIT
          ? `${(gaugeMm / truthMm / 0.85).toFixed(2)} gauge/radar where its neighbours have 1.18: about 2.54 times theirs, as if the unit were another`
          : i === 17
            ? "under trees since spring, by A. Nobody, 2031-05-04"
            : "",
    };
  });
}

function ring(corners: readonly (readonly [number, number])[]): Ring {
  return [...corners, corners[0]].map(([x, y]) => [x * 1000, y * 1000] as const);
}

const CATCHMENT_RINGS: readonly (readonly [string, string, Ring])[] = [
  [
    "C1",
    "Upper Sedge",
    ring([
      [-34, 18],
      [-14, 26],
      [2, 20],
      [4, 6],
      [-12, 2],
      [-30, 6],
    ]),
  ],
  [
    "C2",
    "Lower Sedge",
    ring([
      [4, 6],
      [2, 20],
      [18, 24],
      [30, 14],
      [26, 2],
      [12, 0],
    ]),
  ],
  [
    "C3",
    "Mere Drain",
    ring([
      [-30, 6],
      [-12, 2],
      [4, 6],
      [0, -10],
      [-16, -18],
      [-33, -8],
    ]),
  ],
  [
    "C4",
    "Salter Brook",
    ring([
      [12, 0],
      [26, 2],
      [36, -8],
      [28, -22],
      [10, -18],
      [4, -6],
    ]),
  ],
  [
    "C5",
    "Outer Fen",
    ring([
      [30, 14],
      [40, 30],
      [55, 34],
      [56, 16],
      [44, 6],
      [26, 2],
    ]),
  ],
];

function catchments(): ReportCatchment[] {
  const rows = [
    [31.2, 26.5, 0.98, 44.1, 782.4],
    [38.7, 32.9, 1, 49.8, 571.2],
    [14.9, 12.7, 0.99, 29.3, 640.5],
    [9.4, 8, 1, 33.6, 498.1],
    [7.1, 6, 0.71, 19.5, 530.9],
  ] as const;
  return CATCHMENT_RINGS.map(([id, name, outline], i) => {
    const [adjusted, radar, observedFraction, most, areaKm2] = rows[i];
    const partly = observedFraction < 0.9 ? { reason: "27 % of the area lies beyond usable beam" } : {};
    return {
      id,
      name,
      polygons: [[outline]],
      depth: { mm: adjusted, observedFraction, atCap: i === 1, ...partly },
      radar: { mm: radar, observedFraction, atCap: i === 1, ...partly },
      adjusted: { mm: adjusted, observedFraction, atCap: i === 1, ...partly },
      maxCell: { mm: most, observedFraction: 1, atCap: i === 1 },
      areaKm2,
      range: { p10Mm: adjusted * 0.85, p90Mm: adjusted * 1.18 },
    };
  });
}

const STEPS = 72;

function steps(totalMm: number, peak: number, hole: readonly [number, number] | undefined) {
  const shape = Array.from(
    { length: STEPS },
    (_, i) => Math.exp(-0.5 * ((i - peak) / 7) ** 2) + 0.4 * Math.exp(-0.5 * ((i - peak - 22) / 5) ** 2),
  );
  const sum = shape.reduce((a, b) => a + b, 0);
  const inHole = (i: number) => hole !== undefined && i >= hole[0] && i < hole[1];
  return {
    depthMm: shape.map((part, i) => (inHole(i) ? Number.NaN : part < 0.02 ? 0 : (totalMm * part) / sum)),
    observedFraction: shape.map((_, i) => (inHole(i) ? 0 : 1)),
  };
}

function hyetograph(id: string, label: string, sides: Hyetograph["sides"]): Hyetograph {
  return { id, label, startEpochMs, stepMs: 300_000, sides };
}

function score(
  name: string,
  definition: string,
  value: number,
  unit: string,
  low: number,
  high: number,
): Score {
  return {
    name,
    value,
    unit,
    best: 0,
    definition,
    n: 126,
    dropped: 9,
    intervals: {
      timeBlocks: {
        low: Number.NaN,
        high: Number.NaN,
        level: 0.9,
        reason: "fewer than 8 blocks of 60 minutes",
      },
      gauges: { low, high, level: 0.9 },
    },
  };
}

function scores(after: boolean): ReportScore[] {
  const closer = after ? 0.6 : 1;
  return [
    {
      score: score(
        "biasRatio",
        "sum of radar depth / sum of gauge depth",
        after ? 1.003 : 0.85,
        "1",
        after ? 0.93 : 0.78,
        after ? 1.09 : 0.93,
      ),
    },
    {
      score: score("meanErrorMm", "mean of radar minus gauge", -0.62 * (after ? 0.02 : 1), "mm", -0.9, -0.3),
    },
    { score: score("meanAbsoluteErrorMm", "mean of |radar minus gauge|", 1.12 * closer, "mm", 0.8, 1.5) },
    {
      score: score(
        "rootMeanSquareErrorMm",
        "root of the mean squared difference",
        1.84 * closer,
        "mm",
        1.3,
        2.4,
      ),
    },
    { score: score("pearsonCorrelation", "Pearson correlation", 0.87, "1", 0.79, 0.93) },
    { score: score("klingGupta2012", "KGE' 2012", after ? 0.82 : 0.71, "1", 0.6, 0.85) },
    { score: score("probabilityOfDetection", "hits / gauge yes", 0.93, "1", 0.88, 0.97), thresholdMm: 0.2 },
    { score: score("falseAlarmRatio", "false alarms / radar yes", 0.07, "1", 0.03, 0.12), thresholdMm: 0.2 },
    {
      score: {
        ...score("criticalSuccessIndex", "hits / (hits + misses + false alarms)", Number.NaN, "1", 0, 0),
        n: 0,
        dropped: 0,
        reason: "neither side ever reached the threshold",
      },
      thresholdMm: 20,
    },
  ];
}

/** A whole report's input, invented from end to end. */
export function inventedInput(): ReportInput {
  const allGauges = gauges();
  const allCatchments = catchments();
  return {
    title: "Storm of 3 May 2031 over Saltermoor (invented)",
    reference: "SM-2031-007",
    author: "Duty hydrologist, invented district",
    status: "provisional",
    window: { startEpochMs, endEpochMs },
    zone: "Europe/Amsterdam",
    minObserved: 0.9,
    headline: {
      place: "Saltermoor",
      depth: { mm: 21.6, observedFraction: 0.94, atCap: true },
      basis: "adjusted",
    },
    adjustment: { applied: true, method: "mean-field bias", factor: 1.176, limited: false },
    crossValidation: {
      errorMm: 2.3,
      errorPercent: 14,
      what: "mean absolute error of window totals, each gauge left out in turn",
    },
    cautions: [
      {
        kind: "other",
        text: "412 gates met the rain-rate cap.",
        detail: "Depths marked “at cap” may be too low where it rained hardest.",
      },
      {
        kind: "relation-not-chosen",
        text: "Nobody chose the relation between echo and rain.",
        detail:
          "It is the default, Z = 200 R^1.6. Other relations move the headline between 17.2 and 24.9 mm; see below.",
      },
      {
        kind: "other",
        text: "Outer Fen was observed to 71 % only.",
        detail: "Its depth is at least what is printed.",
      },
      { kind: "other", text: "Two gauges are doubted and take no part." },
      { kind: "other", text: "River board readings are provisional." },
    ],
    grid,
    layers: layers(),
    shownLayerId: "adjusted",
    frames: frames(),
    lattice: lattice(),
    assets: [{ id: "P7", name: "Pumping station", xM: 9500, yM: 9500 }],
    radars,
    gauges: allGauges,
    radarVerdicts: [
      {
        radarId: radars[0].id,
        verdict: "use with care",
        cause: "level of the whole radar",
        sentence: "It has 0.85 times the rain of 20 trusted gauges.",
      },
    ],
    catchments: allCatchments,
    gaugeHyetographs: allGauges.map((gauge, i) =>
      hyetograph(gauge.id, `${gauge.id} ${gauge.network}`, [
        { role: "gauge", ...steps(gauge.gaugeMm, 20 + i, i === 2 ? [30, 44] : undefined) },
        {
          role: "radar",
          ...steps(
            Number.isNaN(gauge.radarMm) ? 0 : gauge.radarMm,
            21 + i,
            Number.isNaN(gauge.radarMm) ? [0, STEPS] : i % 6 === 3 ? [40, 46] : undefined,
          ),
        },
        {
          role: "held-out",
          ...steps(
            Number.isNaN(gauge.radarMm) ? 0 : gauge.radarMm * 1.176,
            21 + i,
            Number.isNaN(gauge.radarMm) ? [0, STEPS] : i % 6 === 3 ? [40, 46] : undefined,
          ),
        },
      ]),
    ),
    catchmentHyetographs: allCatchments.map((catchment, i) =>
      hyetograph(catchment.id, catchment.name, [
        { role: "radar", ...steps(catchment.radar.mm, 24 + 3 * i, i === 4 ? [10, 30] : undefined) },
        { role: "adjusted", ...steps(catchment.depth.mm, 24 + 3 * i, i === 4 ? [10, 30] : undefined) },
      ]),
    ),
    relations: [
      {
        name: "rosenfeld-1993-250/1.2",
        a: 250,
        b: 1.2,
        regime: "tropical rain",
        depth: { mm: 24.9, observedFraction: 0.94 },
        inUse: false,
      },
      {
        name: "fulton-1998-300/1.4",
        a: 300,
        b: 1.4,
        regime: "summer convection",
        depth: { mm: 20.1, observedFraction: 0.94 },
        inUse: false,
      },
      {
        name: "marshall-1955-200/1.6",
        a: 200,
        b: 1.6,
        regime: "widespread rain",
        depth: { mm: 18.4, observedFraction: 0.94, atCap: true },
        inUse: true,
      },
    ],
    scores: {
      pairs: "Hourly pairs over the time that both observed, trusted gauges only",
      radar: scores(false),
      crossValidated: scores(true),
    },
    accounts: [
      {
        deed: "assumed",
        what: "Beam width of inv-quay",
        count: 1,
        unit: "radar",
        why: "the files do not say; 1.0° taken from the plan",
      },
      {
        deed: "left out",
        what: "Scans outside the window",
        count: 14,
        unit: "scans",
        why: "stamped before 12:00 or after 18:00 UTC",
      },
      {
        deed: "left out",
        what: "inv-moor-1335.h5",
        count: 1,
        unit: "scan",
        why: "file ends in the middle of dataset1",
      },
      {
        deed: "capped",
        what: "Gates above 53 dBZ (104 mm/h)",
        count: 412,
        unit: "gates",
        why: "hail cap of the plan",
      },
      {
        deed: "filled",
        what: "Gaps between scans bridged",
        count: 3,
        unit: "gaps",
        why: "none longer than 12.5 minutes",
      },
    ],
    provenance: {
      software: "rainreckon 0.1.0",
      runDigest: "4be1c07a9d3f5526e8a1b0c9d7e6f5a4b3c2d1e0f9a8b7c6d5e4f3a2b1c0d9e8",
      planDigest: "90ab12cd34ef56ab78cd90ef12ab34cd56ef78ab90cd12ef34ab56cd78ef90ab",
      inputs: Array.from({ length: 146 }, (_, i) => ({
        path:
          i < 144
            ? `scans/inv-${i % 2 ? "quay" : "moor"}-${String(i).padStart(3, "0")}.h5`
            : `gauges/network-${i - 143}.csv`,
        kind: i < 144 ? "scan" : "gauge table",
        sha256: (BigInt(i + 7) ** 9n).toString(16).padStart(64, "c0ffee"),
        use: i === 19 ? "left out" : "used",
      })),
      changedSettings: [
        { path: "radars[1].offsetDb", value: "1.5", defaultValue: "0" },
        { path: "intervals.series", value: "PT5M", defaultValue: "PT15M" },
      ],
    },
  };
}
