import type { ReportInput } from "../src/index.ts";

/** What a hostile file may call its gauges: each tries another way out of the text. */
export const HOSTILE_NAMES = [
  '<img src=x onerror="window.broken=1">',
  "</script><script>window.broken=1</script>",
  '"><svg onload=window.broken=1>',
  "' onmouseover='window.broken=1",
  "</title></style><style>*{display:none}</style>",
  "\u202eabc\u0000\u001b[31m",
  "<!-- ]]> {{7*7}} javascript:window.broken=1",
];

const KEPT = new Set(["kind", "quantity", "role", "deed", "status", "basis", "zone"]);

/** The input with a hostile name in place of every text that a file or a person could have written. */
export function hostile(input: ReportInput): ReportInput {
  let next = 0;
  const spoil = (value: unknown, key: string): unknown => {
    if (typeof value === "string") {
      if (KEPT.has(key)) return value;
      const name = HOSTILE_NAMES[next % HOSTILE_NAMES.length];
      next += 1;
      return `${name} ${value}`;
    }
    if (Array.isArray(value)) return value.map((item) => spoil(item, key));
    if (value !== null && typeof value === "object" && !ArrayBuffer.isView(value)) {
      return Object.fromEntries(Object.entries(value).map(([name, item]) => [name, spoil(item, name)]));
    }
    return value;
  };
  return spoil(input, "") as ReportInput;
}
