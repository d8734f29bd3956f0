import { meanRainShare, pairedDepthAt, type RainShare } from "./at-gauge.ts";
import {
  COMBINED,
  combined,
  type LearnedMethod,
  learnMethod,
  type MethodName,
  type MethodSettings,
} from "./methods.ts";
import type { WindowGauge } from "./window-gauges.ts";

/**
 * The gauges to be trusted among some of them, judged as if there were no others. What is judged may be neighbour
 * and witness of what is held out, so the checks of gauges belong inside of holding out.
 */
export type TrustRule = (gauges: readonly WindowGauge[]) => readonly WindowGauge[];

/** All are trusted: for gauges that were judged beforehand. */
export const TRUST_ALL: TrustRule = (gauges) => gauges;

/** What can be learned without some of the gauges. */
export interface Trial {
  /** The gauges trusted among those that are left. */
  readonly trusted: readonly WindowGauge[];
  /** When their rain fell. */
  readonly share: RainShare;
  learn(name: MethodName): LearnedMethod;
  /** Depth that a method learned here gives at a gauge over the time of its pairs, mm; NaN where there is none. */
  depthAt(name: MethodName, gauge: WindowGauge): number;
}

/**
 * Learning without gauges, kept by who was left out: cross-validation within cross-validation leaves out the same
 * pair of gauges twice, in either order.
 */
export class Trials {
  readonly gauges: readonly WindowGauge[];
  readonly #settings: MethodSettings;
  readonly #trust: TrustRule;
  readonly #kept = new Map<string, Trial>();
  readonly #index: ReadonlyMap<WindowGauge, number>;

  /** @param gauges - all of them, trusted or not */
  constructor(gauges: readonly WindowGauge[], settings: MethodSettings, trust: TrustRule) {
    this.gauges = gauges;
    this.#settings = settings;
    this.#trust = trust;
    this.#index = new Map(gauges.map((gauge, i) => [gauge, i]));
  }

  /** @param heldOut - gauges of these trials, each once */
  without(heldOut: readonly WindowGauge[]): Trial {
    const indices = heldOut.map((gauge) => this.#index.get(gauge) ?? -1).sort((a, b) => a - b);
    const key = indices.join();
    const known = this.#kept.get(key) ?? this.#trial(new Set(indices));
    this.#kept.set(key, known);
    return known;
  }

  /** A combination is made of what its parts have learned already. */
  #learn(
    name: MethodName,
    trusted: readonly WindowGauge[],
    learn: (part: MethodName) => LearnedMethod,
  ): LearnedMethod {
    const isOfWindow = this.#settings.over !== "intervals";
    return name === "combined" && isOfWindow
      ? combined(COMBINED.map(learn))
      : learnMethod(name, trusted, this.#settings);
  }

  #trial(heldOut: ReadonlySet<number>): Trial {
    const trusted = this.#trust(this.gauges.filter((_, i) => !heldOut.has(i)));
    const learned = new Map<MethodName, LearnedMethod>();
    const learn = (name: MethodName): LearnedMethod => {
      const known = learned.get(name) ?? this.#learn(name, trusted, learn);
      learned.set(name, known);
      return known;
    };
    return {
      trusted,
      share: meanRainShare(trusted),
      learn,
      depthAt: (name, gauge) => pairedDepthAt(learn(name), gauge),
    };
  }
}
