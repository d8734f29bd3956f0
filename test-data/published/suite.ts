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

declare module "vitest" {
  interface TaskMeta {
    notApplicable?: { readonly id: string; readonly reason: string }[];
  }
}

/**
 * Registers one test per check value of some topics.
 *
 * A binding entry (see {@link isBinding}) that no adapter answers and no reason excuses is a failing
 * test; other kinds are tested only where an adapter answers, and are called sanity ranges. A pattern
 * that fits nothing, and an entry that is both answered and excused, fail too.
 */
export function runReferenceSuite(suite: ReferenceSuite): void {
  const adapters = [...suite.adapters];
  const excuses = suite.notApplicable ?? [];
  const entries = suite.topics
    .flatMap((topic) => checkValues(topic))
    .filter((entry) => suite.only === undefined || fits(suite.only, entry.id))
    .filter((entry) => suite.except === undefined || !fits(suite.except, entry.id));
  const excuseOf = (entry: CheckValue) => excuses.find((excuse) => fits(excuse.id, entry.id));
  const answerOf = (entry: CheckValue) => adapters.find(([pattern]) => fits(pattern, entry.id));

  for (const topic of new Set(entries.map((entry) => entry.topic))) {
    const ofTopic = entries.filter((entry) => entry.topic === topic);
    describe(`${MEASURED_PREFIX}${topic}`, () => {
      for (const entry of ofTopic) {
        const adapter = answerOf(entry)?.[1];
        if (adapter === undefined && (excuseOf(entry) !== undefined || !isBinding(entry))) continue;
        const title = isBinding(entry) ? entry.id : `sanity range (${entry.kind}): ${entry.id}`;
        test(title, () => {
          if (adapter === undefined) expect.fail("no adapter answers it and no reason excuses it");
          expect(differences(entry, adapter(entry)), `${entry.quantity}; ${entry.source}`).toEqual([]);
        });
      }
      test("every entry is answered or excused, not both", ({ task }) => {
        const excused = ofTopic.filter((entry) => excuseOf(entry) !== undefined);
        task.meta.notApplicable = excused.map((entry) => ({
          id: entry.id,
          reason: excuseOf(entry)?.reason ?? "",
        }));
        expect(excused.filter((entry) => answerOf(entry) !== undefined).map(({ id }) => id)).toEqual([]);
      });
    });
  }

  test(`every pattern fits a check value of ${suite.topics.join(", ")}`, () => {
    const answering = new Set(entries.map(answerOf));
    const idleAdapters = adapters.filter((answer) => !answering.has(answer));
    const excusing = new Set(entries.map(excuseOf));
    const idleExcuses = excuses.filter((excuse) => !excusing.has(excuse));
    const idle = [...idleAdapters.map(([pattern]) => pattern), ...idleExcuses.map(({ id }) => id)];
    expect(idle.map(String)).toEqual([]);
  });
}

/** True where an id is the one, or of the kind, that a pattern names. */
export function fits(pattern: IdPattern, id: string): boolean {
  if (pattern instanceof RegExp) return pattern.test(id);
  const parts = pattern.split("*").map((part) => part.replace(/[.+?^${}()|[\]\\]/g, "\\$&"));
  return new RegExp(`^${parts.join(".*")}$`).test(id);
}
