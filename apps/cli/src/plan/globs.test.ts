import path from "node:path";
import { expect, test } from "vitest";
import { globsFor } from "./globs.ts";

const at = (...names: string[]) => names.map((name) => ({ path: path.join("/data", name), root: "/data" }));
const paths = (...names: string[]) => names.map((name) => path.join("/data", name));

test("a root in which every file of an ending is wanted goes as one glob", () => {
  expect(globsFor(paths("a/1.h5", "b/2.h5"), at("a/1.h5", "b/2.h5", "b/x.csv"), "/")).toEqual([
    "data/**/*.h5",
  ]);
  expect(globsFor(paths("1.h5", "2.h5"), at("1.h5", "2.h5"), "/data")).toEqual(["*.h5"]);
});

test("a stranger with the same ending keeps the glob to the folders without one", () => {
  const all = at("a/1.h5", "a/2.h5", "b/3.h5", "b/stranger.h5");
  expect(globsFor(paths("a/1.h5", "a/2.h5", "b/3.h5"), all, "/data")).toEqual(["a/*.h5", "b/3.h5"]);
});

test("files that were named one by one, and files without an ending, stay paths", () => {
  const named = ["/data/1.h5", "/data/2.h5"].map((file) => ({ path: file, root: file }));
  expect(globsFor(["/data/1.h5", "/data/scan"], [...named, ...at("scan")], "/plans")).toEqual([
    "../data/1.h5",
    "../data/scan",
  ]);
});

test("characters that a glob would read are escaped", () => {
  expect(globsFor(paths("[x]/1.h5", "[x]/2.h5"), at("[x]/1.h5", "[x]/2.h5", "y.h5"), "/data")).toEqual([
    "\\[x\\]/*.h5",
  ]);
});
