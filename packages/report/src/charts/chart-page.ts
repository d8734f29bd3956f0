import { createHash } from "node:crypto";
import { html, Markup } from "../text/html.ts";

const STYLE = "body{margin:24px;background:#fff}svg{max-width:100%;height:auto}";

/** A whole page that holds one chart and nothing from elsewhere. */
export function chartPage(title: string, svg: Markup): string {
  const hash = createHash("sha256").update(STYLE).digest("base64");
  return html`<!doctype html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta http-equiv="Content-Security-Policy" content="default-src 'none'; style-src 'sha256-${hash}'; base-uri 'none'; form-action 'none'">
<meta name="viewport" content="width=device-width, initial-scale=1">
<title>${title}</title>
<style>${new Markup(STYLE)}</style>
</head>
<body>${svg}</body>
</html>
`.text;
}
