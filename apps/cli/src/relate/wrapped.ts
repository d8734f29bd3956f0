const WIDTH = 80;

/** Breaks a line at blanks to 80 columns; what follows is indented a little further. */
export function wrapped(line: string): string[] {
  const indent = `${/^ *(- )?/.exec(line)?.[0].replace("-", " ") ?? ""}  `;
  const lines: string[] = [];
  let rest = line;
  while (rest.length > WIDTH) {
    const cut = rest.lastIndexOf(" ", WIDTH);
    if (cut <= indent.length) break;
    lines.push(rest.slice(0, cut));
    rest = `${indent}${rest.slice(cut + 1)}`;
  }
  return [...lines, rest];
}
