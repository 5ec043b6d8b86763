import { escapeXml } from './xml.ts';

/** A picture with the sentence that stands under it. */
export interface Picture {
  /** an `<svg>` element */
  readonly svg: string;
  readonly caption: string;
}

/**
 * One self-contained HTML file: the text a terminal shows, and pictures. No script, nothing fetched: it can be kept for years and
 * opened anywhere.
 */
export function benchReport(title: string, text: string, pictures: readonly Picture[]): string {
  return `<!doctype html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta name="viewport" content="width=device-width, initial-scale=1">
<title>${escapeXml(title)}</title>
<style>
body { font: 16px/1.5 system-ui, sans-serif; color: #1a1a1a; background: #fff; margin: 2rem auto; max-width: 62rem; padding: 0 1rem }
pre { font: 14px/1.45 ui-monospace, monospace; white-space: pre-wrap; overflow-wrap: anywhere; background: #f6f6f3; padding: 1rem; border-left: 4px solid #3b5f7a }
figure { margin: 2rem 0 }
svg { width: 100%; height: auto }
figcaption { color: #444 }
@media print { body { margin: 0; max-width: none } pre { background: none } }
</style>
</head>
<body>
<main>
<h1>${escapeXml(title)}</h1>
<pre>${escapeXml(text.trimEnd())}</pre>
${pictures.map(({ svg, caption }) => `<figure>\n${svg}\n<figcaption>${escapeXml(caption)}</figcaption>\n</figure>`).join('\n')}
</main>
</body>
</html>
`;
}
