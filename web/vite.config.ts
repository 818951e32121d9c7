import { readdir, readFile, writeFile } from 'node:fs/promises';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { promisify } from 'node:util';
import { brotliCompress, gzip } from 'node:zlib';
import { defineConfig, type Plugin } from 'vite';

/** The first script only asks the server and brings the rest: the browser is told of the rest in the page itself. */
const nameScripts = (): Plugin => ({
  name: 'name-scripts',
  transformIndexHtml: {
    order: 'post',
    handler(html, { bundle }) {
      const main = Object.values(bundle ?? {}).find(
        (chunk) => chunk.type === 'chunk' && chunk.facadeModuleId?.endsWith('/main.tsx'),
      );
      const files = main?.type === 'chunk' ? [main.fileName, ...main.imports] : [];
      return files
        .filter((file) => !html.includes(file))
        .map((file) => ({ tag: 'link', attrs: { rel: 'modulepreload', href: `/${file}` }, injectTo: 'head' }));
    },
  },
});

/** Beside each file of the page its compressed forms, so that the server only hands them out. */
const compressFiles = (): Plugin => ({
  name: 'compress-files',
  async writeBundle({ dir = '' }) {
    for (const entry of await readdir(dir, { recursive: true })) {
      if (!/\.(js|css|html|svg)$/.test(entry)) continue;
      const bytes = await readFile(join(dir, entry));
      await writeFile(join(dir, `${entry}.br`), await promisify(brotliCompress)(bytes));
      await writeFile(join(dir, `${entry}.gz`), await promisify(gzip)(bytes, { level: 9 }));
    }
  },
});

export default defineConfig({
  root: fileURLToPath(new URL('.', import.meta.url)),
  oxc: { jsx: { runtime: 'automatic', importSource: 'preact' } },
  plugins: [nameScripts(), compressFiles()],
  build: {
    outDir: fileURLToPath(new URL('../dist/web', import.meta.url)),
    emptyOutDir: true,
    target: 'es2022',
    // No data: URLs: the content policy allows files of the server only.
    assetsInlineLimit: 0,
    modulePreload: { polyfill: false },
    // Few scripts of some size: what every page needs stands in two.
    rolldownOptions: {
      output: {
        codeSplitting: {
          groups: [
            { name: 'start', test: /web\/start\.ts$/, priority: 2 },
            { name: 'main', test: /web\/main\.tsx$/, priority: 1 },
          ],
        },
      },
    },
  },
});
