import { readdirSync, readFileSync } from "node:fs";
import path from "node:path";
import { fileURLToPath } from "node:url";

/** The workspace's root. */
export const ROOT = fileURLToPath(new URL("../../..", import.meta.url));

/** A source file of a package, tests and benches left out. */
export interface Source {
  /** "core", "formats", …, "cli". */
  readonly owner: string;
  /** From the root, with forward slashes. */
  readonly file: string;
  readonly text: string;
  /** The same text without comments, so that what a comment tells of is not taken for code. */
  readonly code: string;
}

export const PACKAGES = readdirSync(path.join(ROOT, "packages")).filter((name) => name !== "config");

export function sourcesOf(owner: string): Source[] {
  const home = owner === "cli" ? "apps/cli" : owner === "test-data" ? "test-data" : `packages/${owner}`;
  const folder = path.join(ROOT, home, owner === "test-data" ? "" : "src");
  return readdirSync(folder, { recursive: true, encoding: "utf8" })
    .filter(
      (name) =>
        name.endsWith(".ts") && !name.endsWith(".test.ts") && !/(^|\/)(node_modules|dist)\//.test(name),
    )
    .sort()
    .map((name) => {
      const file = path.posix.join(home, owner === "test-data" ? "" : "src", name);
      const text = readFileSync(path.join(ROOT, file), "utf8");
      return { owner, file, text, code: withoutComments(text) };
    });
}

function withoutComments(text: string): string {
  // Strings are matched first and kept, so that "//" inside one does not start a comment.
  return text.replace(
    /("(?:[^"\\\n]|\\.)*"|'(?:[^'\\\n]|\\.)*'|`(?:[^`\\]|\\.)*`)|\/\*[\s\S]*?\*\/|\/\/[^\n]*/g,
    (_all, string: string | undefined) => string ?? " ",
  );
}

/** What a file imports, types too, as written. */
export function importsOf(code: string): string[] {
  const found: string[] = [];
  const statement =
    /^\s*(?:import|export)\s(?:[^;"']*?\sfrom\s)?\s*["']([^"'\n]+)["']|\bimport\(\s*["']([^"'\n]+)["']/gm;
  for (const match of code.matchAll(statement)) found.push((match[1] ?? match[2])!);
  return found;
}

/** The names that a module exports, those it passes on from its neighbours included. */
export function exportedNames(file: string): string[] {
  const code = withoutComments(readFileSync(file, "utf8"));
  const names = new Set<string>();
  for (const [, star, source] of code.matchAll(/^export (\*|type \*) from ["']([^"']+)["']/gm)) {
    if (star !== undefined)
      for (const name of exportedNames(path.resolve(path.dirname(file), source!))) names.add(name);
  }
  for (const [, list] of code.matchAll(/^export (?:type )?\{([^}]*)\}/gm)) {
    for (const item of list!.split(",")) {
      const name = /([\w$]+)\s*$/.exec(item)?.[1];
      if (name !== undefined) names.add(name);
    }
  }
  const declared =
    /^export (?:declare |abstract |async )*(?:const|let|function\*?|class|interface|type) ([\w$]+)/gm;
  for (const [, name] of code.matchAll(declared)) names.add(name!);
  return [...names].sort();
}
