import { readFile, writeFile } from "node:fs/promises";
import { join } from "node:path";
import { InputError } from "@rainreckon/core";
import { expect, test } from "vitest";
import { FULL_DEVICE, scratchFolder } from "../../test/foreign-tools.ts";
import { outputFault } from "./fault.ts";
import { sha256OfFile, withoutControlCharacters, writeText } from "./text.ts";

const folder = scratchFolder();

// NIST, Cryptographic Standards and Guidelines, example values for SHA-256 ("abc"), and the
// million-"a" case of FIPS 180-2, appendix B.3; both from memory.
test.each([
  ["abc", "abc", "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"],
  ["a million a", "a".repeat(1_000_000), "cdc76e5c9914fb9281a1c7e284d73e67f1809a48a497200e046d39ccc7112cd0"],
])("SHA-256 of %s is the published one", async (name, text, expected) => {
  const path = join(folder, name);
  await writeFile(path, text);
  expect(await sha256OfFile(path)).toBe(expected);
});

test("a file that is not there has no digest, and the fault names it", async () => {
  const path = join(folder, "absent");
  await expect(sha256OfFile(path)).rejects.toMatchObject({ name: "InputError", where: path });
});

test("pieces longer and shorter than one write arrive whole and in order", async () => {
  const path = join(folder, "pieces.txt");
  const pieces = ["å\n", "b".repeat(200_000), "", "ç"];
  await writeText(path, pieces);
  expect(await readFile(path, "utf8")).toBe(pieces.join(""));
});

test("an empty text leaves an empty file in place of an old one", async () => {
  const path = join(folder, "old.txt");
  await writeText(path, "old");
  await writeText(path, "");
  expect(await readFile(path, "utf8")).toBe("");
});

test.skipIf(!FULL_DEVICE)(
  "a full disk is a failure midway, whether the text is short or long (skipped where there is no /dev/full)",
  async () => {
    for (const text of ["short", "l".repeat(1_000_000)]) {
      await expect(writeText("/dev/full", text)).rejects.toMatchObject({
        name: "InputError",
        kind: "midway",
        where: "/dev/full",
        what: "no space left while writing",
      });
    }
  },
);

test.each([
  ["a missing folder", join(folder, "no", "such", "file"), "the folder of this file does not exist"],
  ["a folder in its place", folder, "a folder stands where the file should go"],
])("%s is wrong usage", async (_name, path, what) => {
  await expect(writeText(path, "text")).rejects.toMatchObject({ kind: "usage", where: path, what });
});

test.each([
  ["EACCES", "usage"],
  ["EROFS", "usage"],
  ["EDQUOT", "midway"],
  ["EIO", "midway"],
])("the system's %s is a fault of kind %s that keeps its cause", (code, kind) => {
  const cause = Object.assign(new Error(code), { code });
  const fault = outputFault("totals.nc", cause);
  expect(fault).toBeInstanceOf(InputError);
  expect(fault).toMatchObject({ kind, where: "totals.nc", cause });
});

test("what the pieces throw is not called a fault of the disk", async () => {
  const failing = function* () {
    yield "begun";
    throw new RangeError("no more");
  };
  await expect(writeText(join(folder, "half.txt"), failing())).rejects.toBeInstanceOf(RangeError);
});

test("control characters vanish, line breaks become blanks, letters of all scripts stay", () => {
  expect(withoutControlCharacters("a\u0000\u001b[31mb\u007f\u0085c\r\nd\te")).toBe("a[31mb c d e");
  expect(withoutControlCharacters("Ångström 雨量")).toBe("Ångström 雨量");
  expect(withoutControlCharacters("one\r\ntwo\nthree\u0007", true)).toBe("one\ntwo\nthree");
});
