import { createHash } from 'node:crypto';
import { defineConfig, type Plugin } from 'vite';
import { STYLE_SHEET } from './src/report/styleSheet.ts';
import { PAGE_STYLE } from './src/page/pageStyle.ts';

const hashOf = (text: string): string => `'sha256-${createHash('sha256').update(text).digest('base64')}'`;

/** One file: script and style inside, nothing else may run, load or be asked for. */
function oneFile(): Plugin {
  return {
    name: 'one-file',
    enforce: 'post',
    generateBundle: {
      order: 'post',
      handler(_, bundle) {
        const html = Object.values(bundle).find((part) => part.fileName.endsWith('.html'));
        const scripts = Object.values(bundle).filter((part) => part.type === 'chunk');
        if (html?.type !== 'asset' || scripts.length !== 1)
          this.error(`expected one page and one script; received ${Object.keys(bundle).join(', ')}`);
        // Inside a script element only these two sequences have a meaning for the parser; both occur in texts alone.
        const script = scripts[0]!.code.replaceAll('</script', '<\\/script').replaceAll('<!--', '<\\!--');
        const style = `${STYLE_SHEET}${PAGE_STYLE}`;
        const policy = [
          `default-src 'none'`,
          `script-src ${hashOf(script)}`,
          `style-src ${hashOf(style)}`,
          `worker-src blob:`,
          `base-uri 'none'`,
          `form-action 'none'`,
        ].join('; ');
        html.source = String(html.source)
          .replace(/\s*<script[^>]*src=[^>]*><\/script>/, '')
          .replace(
            '<meta charset="utf-8" />',
            () => `<meta charset="utf-8" />\n    <meta http-equiv="Content-Security-Policy" content="${policy}" />`,
          )
          .replace('</head>', () => `<style>${style}</style>\n  </head>`)
          .replace('</body>', () => `<script type="module">${script}</script>\n  </body>`);
        html.fileName = 'tankhue.html';
        for (const part of scripts) delete bundle[part.fileName];
      },
    },
  };
}

/** Our own files do nothing when they are loaded, so what is not used is left out; notices of libraries stand once, in the page's head. */
const ROLLED = {
  treeshake: {
    moduleSideEffects: (id: string) => id.includes('node_modules') || /\/page\/(main|worker)\.tsx?/.test(id),
  },
  output: { codeSplitting: false, comments: { legal: false } },
} as const;

// vite reads its configuration as a default export.
// oxlint-disable-next-line import/no-default-export
export default defineConfig({
  root: 'src/page',
  logLevel: 'warn',
  build: {
    outDir: '../../dist/page',
    emptyOutDir: true,
    target: 'es2022',
    modulePreload: false,
    assetsInlineLimit: Number.MAX_SAFE_INTEGER,
    chunkSizeWarningLimit: 2000,
    rolldownOptions: ROLLED,
  },
  worker: { format: 'iife', rolldownOptions: ROLLED },
  plugins: [oneFile()],
});
