import { readFile, stat } from "node:fs/promises";
import { InputError } from "@rainreckon/core";

/** All bytes of a file. @throws InputError where the file cannot be opened, or is larger than it may be */
export async function readWhole(path: string, maxBytes: number): Promise<Uint8Array> {
  try {
    const { size } = await stat(path);
    if (size > maxBytes) {
      throw new InputError(
        `the file has ${size} bytes, more than ${maxBytes}`,
        path,
        "simplify the polygons",
      );
    }
    return await readFile(path);
  } catch (cause) {
    if (cause instanceof InputError) throw cause;
    throw new InputError("the file cannot be opened", path, "check that it is there and may be read", {
      cause,
    });
  }
}
