import { InputError } from "@rainreckon/core";

const NO_SPACE = new Set(["ENOSPC", "EDQUOT", "EFBIG"]);
const NO_RIGHT = new Set(["EACCES", "EPERM", "EROFS"]);
const NO_FOLDER = new Set(["ENOENT", "ENOTDIR"]);

/**
 * What the system says when a file cannot be written, as a fault that the user can mend.
 *
 * A place that cannot be written at all is wrong usage; a disk that fills up is a failure midway.
 *
 * @param path - the file that was being written
 * @param cause - the error as the system gave it; its `code` decides
 */
export function outputFault(path: string, cause: unknown): InputError {
  const code = errorCode(cause);
  if (NO_SPACE.has(code)) {
    return new InputError(
      "no space left while writing",
      path,
      "free space there or write somewhere else, then run again",
      {
        kind: "midway",
        cause,
      },
    );
  }
  if (NO_RIGHT.has(code)) {
    return new InputError("not allowed to write", path, "choose a folder that you may write to", {
      kind: "usage",
      cause,
    });
  }
  if (NO_FOLDER.has(code)) {
    return new InputError("the folder of this file does not exist", path, "create it, or choose another", {
      kind: "usage",
      cause,
    });
  }
  if (code === "EISDIR") {
    return new InputError("a folder stands where the file should go", path, "choose another name", {
      kind: "usage",
      cause,
    });
  }
  const reason = code || (cause instanceof Error ? cause.message : String(cause));
  return new InputError(
    `writing failed (${reason})`,
    path,
    "check the disk or write somewhere else, then run again",
    { kind: "midway", cause },
  );
}

function errorCode(cause: unknown): string {
  if (typeof cause !== "object" || cause === null || !("code" in cause)) return "";
  return typeof cause.code === "string" ? cause.code : "";
}
