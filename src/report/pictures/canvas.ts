import { createRequire } from 'node:module';
import { setImmediate as turn } from 'node:timers/promises';
import type { ChartConfiguration } from 'chart.js';
import { ChartJSNodeCanvas } from 'chartjs-node-canvas';

/** Pixels at scale 1; everything in a picture is laid out for it. */
export const WIDTH = 1200;
export const HEIGHT = 700;

/** Shipped font: where a machine has none, text would silently be missing. */
const FAMILY = 'upsettle-sans';

const require = createRequire(import.meta.url);
let renderer: ChartJSNodeCanvas | null = null;

/*
 * One renderer for all pictures: each further one would load its own copy of the chart library and never give it
 * back. Plugins are named, not passed, so that they bind to that copy.
 */
function make(): ChartJSNodeCanvas {
  const made = new ChartJSNodeCanvas({
    width: WIDTH,
    height: HEIGHT,
    backgroundColour: 'white',
    plugins: { modern: ['chartjs-plugin-annotation', 'chartjs-chart-matrix'] },
    chartCallback: (chart) => {
      chart.defaults.font.family = FAMILY;
      chart.defaults.font.size = 14;
      chart.defaults.color = '#222222';
      chart.defaults.borderColor = '#d9d9d9';
    },
  });
  made.registerFont(require.resolve('dejavu-fonts-ttf/ttf/DejaVuSans.ttf'), { family: FAMILY });
  made.registerFont(require.resolve('dejavu-fonts-ttf/ttf/DejaVuSans-Bold.ttf'), {
    family: FAMILY,
    weight: 'bold',
  });
  return made;
}

/** Draws a chart to PNG bytes. Canvases are only freed when the event loop turns, so it does in between. */
export async function draw(config: ChartConfiguration, scale = 1): Promise<Buffer> {
  renderer ??= make();
  config.options = { ...config.options, devicePixelRatio: scale, animation: false, responsive: false };
  const png = await renderer.renderToBuffer(config);
  await turn();
  return png;
}
