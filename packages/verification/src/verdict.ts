/** What is to be done with a gauge, or with a radar. */
export type Verdict = "use" | "use with care" | "leave out" | "too little rain to judge";

/** Whose fault a difference is. */
export type Blame = "gauge" | "network" | "radar" | "nobody";

interface CauseDefinition {
  readonly blame: Blame;
  /** As people read it; details may follow, as "clock off: 60 min late". */
  readonly words: string;
}

/** Every cause that a difference between gauge and radar can be put down to: one list for gauges and radars. */
export const CAUSES = {
  dead: { blame: "gauge", words: "dead" },
  "dies-part-way": { blame: "gauge", words: "dies part way" },
  blocked: { blame: "gauge", words: "blocked" },
  "partly-blocked": { blame: "gauge", words: "partly blocked" },
  "clock-off": { blame: "gauge", words: "clock off" },
  "wrong-unit": { blame: "gauge", words: "wrong unit or factor" },
  spike: { blame: "gauge", words: "spike" },
  "impossible-value": { blame: "gauge", words: "impossible value" },
  duplicate: { blame: "gauge", words: "duplicate" },
  misplaced: { blame: "gauge", words: "misplaced" },
  "missing-readings": { blame: "gauge", words: "missing readings" },
  "flat-line": { blame: "gauge", words: "flat line" },
  "repeated-value": { blame: "gauge", words: "repeated value" },
  "counter-reset": { blame: "gauge", words: "counter reset" },
  "odd-resolution": { blame: "gauge", words: "values off the tip size" },
  "test-tips": { blame: "gauge", words: "test tips on a dry day" },
  "late-release": { blame: "gauge", words: "slow drain or late release" },
  melt: { blame: "gauge", words: "melt in an unheated gauge" },
  "under-reads-heavy-rain": { blame: "gauge", words: "reads less the harder it rains" },
  "network-unit": { blame: "network", words: "whole network off: unit or factor" },
  "network-clock": { blame: "network", words: "whole network off: clock" },
  "beam-too-high": { blame: "radar", words: "radar: beam too high" },
  "bright-band": { blame: "radar", words: "radar: bright band" },
  "behind-attenuation": { blame: "radar", words: "radar: behind attenuation" },
  "blocked-sector": { blame: "radar", words: "radar: blocked sector" },
  clutter: { blame: "radar", words: "radar: clutter" },
  "below-detection": { blame: "radar", words: "radar: below detection" },
  "at-cap": { blame: "radar", words: "radar: at the cap" },
  "hole-in-time": { blame: "radar", words: "radar: hole in time" },
  hail: { blame: "radar", words: "radar: hail taken for rain" },
  "radar-clock": { blame: "radar", words: "radar: clock off against all gauges" },
  "radar-level": { blame: "radar", words: "radar: level of the whole radar (calibration or relation)" },
  "small-shower": { blame: "nobody", words: "a shower smaller than a cell" },
  unexplained: { blame: "nobody", words: "differs, and no check says why" },
} as const satisfies Readonly<Record<string, CauseDefinition>>;

export type CauseName = keyof typeof CAUSES;

/** The likeliest cause of what was found. */
export interface LikelyCause {
  readonly name: CauseName;
  readonly blame: Blame;
  /** The cause's words with its details: what `gauges.csv` and people read. */
  readonly words: string;
  /** Of a clock: by how many minutes stamps are too late; negative where too early. */
  readonly minutesLate?: number;
  /** Of a unit: what values are too large by. */
  readonly factor?: number;
}

/** What one check found. */
export interface Finding {
  readonly check: CheckName;
  /** What it speaks for; other evidence may outweigh it. */
  readonly speaksFor: CauseName;
  /** Units in the names. */
  readonly numbers: Readonly<Record<string, number>>;
  /** One plain sentence with numbers. */
  readonly sentence: string;
}

/** Every check, in the order in which findings are told. */
export const CHECKS = [
  "rate limits",
  "isolated spike",
  "flat line",
  "repeated value",
  "counter resets",
  "tip resolution",
  "duplicates",
  "missing readings",
  "test tips",
  "late release",
  "melt",
  "rate dependence",
  "silence",
  "neighbours",
  "double mass",
  "impossible dry",
  "unit",
  "network unit",
  "network clock",
  "ratio over time",
  "wet against dry",
  "lag",
  "place",
  "radar's sight",
] as const;

export type CheckName = (typeof CHECKS)[number];

/** A likely cause with its words; `details` follow a colon. */
export function likelyCause(
  name: CauseName,
  details = "",
  numbers: Pick<LikelyCause, "minutesLate" | "factor"> = {},
): LikelyCause {
  const { blame, words } = CAUSES[name];
  return { name, blame, words: details === "" ? words : `${words}: ${details}`, ...numbers };
}

/** What all checks together make of a gauge. */
export interface GaugeVerdict {
  readonly network: string;
  readonly gaugeId: string;
  readonly verdict: Verdict;
  /** Undefined where nothing asks for one. A cause on the radar's side, or nobody's, leaves the gauge in use. */
  readonly cause: LikelyCause | undefined;
  /** In the order of {@link CHECKS}; also those that another cause outweighs. */
  readonly findings: readonly Finding[];
  /** One or two plain sentences with numbers on how far the gauge can be trusted. */
  readonly evidence: string;
  /** Whether the gauge may shape an adjustment and enter scores: `use`, `use with care` and too little rain. */
  readonly trusted: boolean;
  /** Why a gauge is not trusted: what its pairs carry as their reason; empty for a trusted one. */
  readonly leftOutReason: string;
}

/** Radar beside the trusted gauges of a group, by time or place. */
export interface BiasGroup {
  /** "0-50 km", "N", "12:00-13:00Z"; empty for all together. */
  readonly label: string;
  readonly gauges: number;
  readonly gaugeMm: number;
  readonly radarMm: number;
  /** Radar over gauge as a ratio of sums, with the ends of an interval of 95 % over gauges; NaN where not known. */
  readonly ratio: number;
  readonly low: number;
  readonly high: number;
}

/** A radar beside a neighbour, over cells or gauges that both see. */
export interface NeighbourBias {
  readonly radarId: string;
  /** Places that both see. */
  readonly n: number;
  /** This radar over the neighbour, dB, with the ends of an interval of 95 %. */
  readonly differenceDb: number;
  readonly lowDb: number;
  readonly highDb: number;
}

/** What the trusted gauges and its neighbours make of a radar. */
export interface RadarVerdict {
  readonly radarId: string;
  readonly verdict: Verdict;
  readonly cause: LikelyCause | undefined;
  readonly whole: BiasGroup;
  readonly byRange: readonly BiasGroup[];
  /** Eight sectors of 45°, the first one around north; those without gauges are absent. */
  readonly bySector: readonly BiasGroup[];
  readonly overTime: readonly BiasGroup[];
  readonly againstNeighbours: readonly NeighbourBias[];
  /** One plain sentence with numbers. */
  readonly sentence: string;
}
