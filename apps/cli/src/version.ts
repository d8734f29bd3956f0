import { readFileSync } from "node:fs";

/** The program's version, from the package file that lies beside the folder of this code, built or not. */
export function version(): string {
  const text = readFileSync(new URL("../package.json", import.meta.url), "utf8");
  return (JSON.parse(text) as { version: string }).version;
}
