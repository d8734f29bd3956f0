import { InputError } from "@rainreckon/core";
import { z } from "zod";
import { nearest } from "../text/nearest.ts";
import { planSchema } from "./schema.ts";
import { type PlanPath, pathText } from "./yaml-place.ts";

/** One thing wrong with a plan. */
export interface PlanFault {
  readonly path: PlanPath;
  readonly what: string;
  readonly fix: string;
}

/** What zod found, in the plan's own words: one fault for each misspelt key, wrong type or value out of range. */
export function faultsOfIssues(issues: readonly z.core.$ZodIssue[]): PlanFault[] {
  return issues.flatMap((issue) => faultsOfIssue(issue, []));
}

function faultsOfIssue(issue: z.core.$ZodIssue, above: PlanPath): PlanFault[] {
  const path: PlanPath = [
    ...above,
    ...issue.path.map((step) => (typeof step === "number" ? step : String(step))),
  ];
  const name = pathText(path);
  if (issue.code === "unrecognized_keys") {
    const known = keysAt(path);
    return issue.keys.map((key) => {
      if (known.includes(key)) {
        return {
          path: [...path, key],
          what: `"${key}" does not go with the other keys here`,
          fix: `write one of the two forms: ${formsAt(path)}`,
        };
      }
      const meant = nearest(key, known);
      return {
        path: [...path, key],
        what: `there is no key "${key}" here`,
        fix: meant === undefined ? `known keys: ${known.join(", ")}` : `did you mean "${meant}"?`,
      };
    });
  }
  if (issue.code === "invalid_union") {
    // The branch that got furthest is the one that was meant: its faults lie deepest.
    const branches = issue.errors.filter((errors) =>
      errors.some((error) => error.path.length > 0 || error.code !== "invalid_type"),
    );
    const meant = branches[0];
    if (meant !== undefined) return meant.flatMap((error) => faultsOfIssue(error, path));
    return [{ path, what: `${name} has a form that does not fit`, fix: `it may be ${formsAt(path)}` }];
  }
  if (issue.code === "invalid_type" && issue.message.includes("received undefined")) {
    return [{ path, what: `${name} is missing`, fix: `add it; it is ${formsAt(path)}` }];
  }
  const wanted = describeAt(path);
  if (issue.code === "too_big" && issue.origin === "string")
    return [{ path, what: `${name} is too long`, fix: `write at most ${issue.maximum} characters` }];
  return [
    {
      path,
      what: wrongValue(name, issue),
      fix: wanted === undefined ? "write a value that fits" : `it is ${wanted}`,
    },
  ];
}

function wrongValue(name: string, issue: z.core.$ZodIssue): string {
  if (issue.code === "invalid_value") return `${name} is none of the values that it may have`;
  const isNumber = "origin" in issue && ["number", "int"].includes(issue.origin);
  if (issue.code === "too_big" && isNumber) return `${name} is too large`;
  if (issue.code === "too_small" && isNumber) return `${name} is too small`;
  return `${name}: ${sentence(issue.message)}`;
}

/** zod's own messages start with a word of their own; inside a line they read on. */
function sentence(message: string): string {
  return message
    .replace(/^Invalid input: /, "")
    .replace(/^Invalid /, "invalid ")
    .replace(/^Too /, "too ");
}

/** Faults as one error: the first speaks, the others travel as its cause and are printed after it. */
export function planError(
  faults: readonly PlanFault[],
  where: (path: PlanPath) => string,
  order: (path: PlanPath) => number,
): InputError {
  const sorted = [...faults].sort((a, b) => order(a.path) - order(b.path));
  const errors = sorted.map(
    (fault) => new InputError(fault.what, where(fault.path), fault.fix, { kind: "usage" }),
  );
  const [first, ...others] = errors;
  if (others.length === 0) return first!;
  return new InputError(first!.what, first!.where, first!.fix, {
    kind: "usage",
    cause: new AggregateError(others, "further faults of the same plan"),
  });
}

type JsonSchema = {
  readonly type?: string;
  readonly description?: string;
  readonly enum?: readonly unknown[];
  readonly minimum?: number;
  readonly maximum?: number;
  readonly exclusiveMinimum?: number;
  readonly properties?: Readonly<Record<string, JsonSchema>>;
  readonly items?: JsonSchema;
  readonly prefixItems?: readonly JsonSchema[];
  readonly anyOf?: readonly JsonSchema[];
};

let planJsonSchema: JsonSchema | undefined;

/** The parts of the plan's schema that may stand at a path: several where it offers a choice. */
function schemasAt(path: PlanPath): JsonSchema[] {
  planJsonSchema ??= z.toJSONSchema(planSchema, { io: "input" }) as JsonSchema;
  let places: JsonSchema[] = [planJsonSchema];
  for (const step of path) {
    places = places.flatMap(choices).flatMap((place) => {
      const next =
        typeof step === "number" ? (place.prefixItems?.[step] ?? place.items) : place.properties?.[step];
      return next === undefined ? [] : [next];
    });
  }
  return places.flatMap(choices);
}

function choices(place: JsonSchema): JsonSchema[] {
  return place.anyOf === undefined ? [place] : place.anyOf.flatMap(choices);
}

function keysAt(path: PlanPath): string[] {
  return [...new Set(schemasAt(path).flatMap((place) => Object.keys(place.properties ?? {})))];
}

function describeAt(path: PlanPath): string | undefined {
  const forms = schemasAt(path).map(describe);
  return forms.length === 0 ? undefined : forms.join(", or ");
}

function formsAt(path: PlanPath): string {
  return describeAt(path) ?? "not known";
}

function describe(place: JsonSchema): string {
  if (place.description !== undefined) return place.description;
  if (place.enum !== undefined)
    return `one of ${place.enum.map((value) => JSON.stringify(value)).join(", ")}`;
  if (place.properties !== undefined) return `a map with ${Object.keys(place.properties).join(", ")}`;
  if (place.type === "array") return "a list";
  if (place.type === "string") return "a text (in quotes where it looks like a number)";
  if (place.type === "number" || place.type === "integer") {
    const noun = place.type === "integer" ? "a whole number" : "a number";
    if (place.exclusiveMinimum !== undefined) return `${noun} above ${place.exclusiveMinimum}`;
    const bounded =
      place.minimum !== undefined && place.maximum !== undefined && place.maximum < Number.MAX_SAFE_INTEGER;
    return bounded ? `${noun} from ${place.minimum} to ${place.maximum}` : noun;
  }
  return place.type === "boolean" ? "true or false" : "another form";
}
