import { describe, expect, test } from "vitest";
import { type CheckValue, checkValues, isBinding } from "./entries.ts";
import { differences } from "./tolerance.ts";

/** An id, an id with `*` for any run of characters, or a regular expression. */
export type IdPattern = string | RegExp;

/** Answers a check value's question with the function under test; what it returns is held against `expected`. */
export type Adapter = (entry: CheckValue) => unknown;

/** A check value that none of our functions answers, and why. */
export interface NotApplicable {
  readonly id: IdPattern;
  readonly reason: string;
}

export interface ReferenceSuite {
  /** Topics, or beginnings of topics: ["c-zr-relations", "g-beam-geometry"]. */
  readonly topics: readonly string[];
  /** Leaves all other entries of the topics to someone else. */
  readonly only?: IdPattern;
  /** Leaves these entries of the topics to another package. */
  readonly except?: IdPattern;
  /** A Map or a list of pairs; the first pattern that fits an id answers for it. */
  readonly adapters: Iterable<readonly [IdPattern, Adapter]>;
  readonly notApplicable?: readonly NotApplicable[];
}

/** What the summary of `npm run reference` reads from the run: nothing is counted that did not run. */
export const MEASURED_PREFIX = "published values: ";
export const SANITY_PREFIX = "sanity range: ";

declare module "vitest" {
  interface TaskMeta {
    notApplicable?: { readonly id: string; readonly reason: string }[];
  }
}

/** A check value with what a suite does about it. */
export interface SortedEntry {
  readonly entry: CheckValue;
  readonly adapter: Adapter | undefined;
  readonly reason: string | undefined;
}

/**
 * The entries of a suite's topics with their adapters and reasons, and what is wrong with the suite itself.
 *
 * @returns `faults`: entries that are both answered and excused, and patterns that fit no entry
 */
export function sortEntries(suite: ReferenceSuite): {
  readonly sorted: readonly SortedEntry[];
  readonly faults: readonly string[];
} {
  const answers = [...suite.adapters];
  const excuses = suite.notApplicable ?? [];
  const used = new Set<unknown>();
  const faults: string[] = [];
  const sorted = suite.topics
    .flatMap((topic) => checkValues(topic))
    .filter(({ id }) => suite.only === undefined || fits(suite.only, id))
    .filter(({ id }) => suite.except === undefined || !fits(suite.except, id))
    .map((entry) => {
      const answer = answers.find(([pattern]) => fits(pattern, entry.id));
      const excuse = excuses.find(({ id }) => fits(id, entry.id));
      used.add(answer).add(excuse);
      if (answer !== undefined && excuse !== undefined) faults.push(`${entry.id} is answered and excused`);
      return { entry, adapter: answer?.[1], reason: excuse?.reason };
    });
  for (const answer of answers) if (!used.has(answer)) faults.push(`adapter ${answer[0]} fits nothing`);
  for (const excuse of excuses) if (!used.has(excuse)) faults.push(`reason for ${excuse.id} fits nothing`);
  return { sorted, faults };
}

/**
 * Registers one test per check value of some topics.
 *
 * A binding entry (see `isBinding`) that no adapter answers and no reason excuses is a failing test; other
 * kinds are tested only where an adapter answers, and are called sanity ranges. The faults that
 * {@link sortEntries} finds are failures too.
 */
export function runReferenceSuite(suite: ReferenceSuite): void {
  const { sorted, faults } = sortEntries(suite);
  for (const topic of new Set(sorted.map(({ entry }) => entry.topic))) {
    const ofTopic = sorted.filter(({ entry }) => entry.topic === topic);
    describe(`${MEASURED_PREFIX}${topic}`, () => {
      for (const item of ofTopic) registerEntry(item);
      test("the suite answers or excuses each entry once, and has no idle pattern", ({ task }) => {
        task.meta.notApplicable = ofTopic.flatMap(({ entry, reason }) =>
          reason === undefined ? [] : [{ id: entry.id, reason }],
        );
        expect(faults).toEqual([]);
      });
    });
  }
}

function registerEntry({ entry, adapter, reason }: SortedEntry): void {
  if (adapter !== undefined) {
    test(isBinding(entry) ? entry.id : `${SANITY_PREFIX}${entry.id}`, () => {
      expect(differences(entry, adapter(entry)), `${entry.quantity}; ${entry.source}`).toEqual([]);
    });
  } else if (isBinding(entry) && reason === undefined) {
    test(entry.id, () => expect.fail("no adapter answers it and no reason excuses it"));
  }
}

/** True where an id is the one, or of the kind, that a pattern names. */
export function fits(pattern: IdPattern, id: string): boolean {
  if (pattern instanceof RegExp) return pattern.test(id);
  const parts = pattern.split("*").map((part) => part.replace(/[.+?^${}()|[\]\\]/g, "\\$&"));
  return new RegExp(`^${parts.join(".*")}$`).test(id);
}
