// The command, the library, and the parts that they load when needed. Packages with binaries or fonts stay outside.
import { fileURLToPath } from 'node:url';

const dist = fileURLToPath(new URL('../../dist', import.meta.url));

export default [
  {
    input: {
      upsettle: fileURLToPath(new URL('../cli/upsettle.ts', import.meta.url)),
      // What other programs import; it shares its parts with the command.
      index: fileURLToPath(new URL('../library/index.ts', import.meta.url)),
      // Worker threads load a file of their own.
      'ensemble-worker': fileURLToPath(new URL('../study/commission/worker.ts', import.meta.url)),
      'map-worker': fileURLToPath(new URL('../study/rehearse/worker.ts', import.meta.url)),
    },
    platform: 'node',
    external: [/^chart/, /^canvas/, /^@napi-rs/, /^dejavu/, /^tinypool/],
    output: {
      dir: dist,
      format: 'esm',
      entryFileNames: '[name].js',
      chunkFileNames: 'parts/[name]-[hash].js',
      minify: { compress: true, mangle: false, codegen: { removeWhitespace: false } },
    },
  },
  // What a report page does in the browser: one script with the chart library in it.
  {
    input: fileURLToPath(new URL('../report/page/client.js', import.meta.url)),
    platform: 'browser',
    output: { file: `${dist}/page-client.js`, format: 'iife', minify: true },
  },
];
