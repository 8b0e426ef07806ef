// What the report page does in the browser: charts from the data in the page, ranges, series, the moment slider, tables.
import Chart from 'chart.js/auto';
import annotation from 'chartjs-plugin-annotation';

Chart.register(annotation);

const data = JSON.parse(document.getElementById('data').textContent);
const make = (tag, attributes = {}, ...children) => {
  const e = document.createElement(tag);
  for (const [k, v] of Object.entries(attributes)) e.setAttribute(k, v);
  e.append(...children);
  return e;
};
const say = (v) =>
  v === null || v === undefined || Number.isNaN(v)
    ? '–'
    : Number(v)
        .toPrecision(4)
        .replace(/\.?0+$/, '');
const charts = [];
let onPaper = false;

/** Colours of the page as it is now: light, dark, or on paper. */
function theme() {
  const css = getComputedStyle(document.documentElement);
  const of = (name) => css.getPropertyValue(name).trim();
  return onPaper
    ? { text: '#222222', grid: '#dddddd', back: '#ffffff', limit: '#B00020' }
    : { text: of('--text'), grid: of('--grid'), back: of('--back'), limit: of('--limit') };
}

/** Black lines would vanish on a dark page. */
const seen = (colour) => (colour === '#000000' ? theme().text : colour);

function options(x, y, extra = {}) {
  const t = theme();
  const axis = (o) => ({
    type: 'linear',
    ...o,
    grid: { color: t.grid },
    ticks: { color: t.text, maxTicksLimit: 9, ...(o.ticks ?? {}) },
    title: { display: true, text: o.label, color: t.text },
  });
  return {
    animation: false,
    parsing: false,
    normalized: true,
    maintainAspectRatio: false,
    interaction: { mode: 'nearest', axis: 'x', intersect: false },
    scales: { x: axis(x), y: axis(y) },
    ...extra,
  };
}

/** One panel of a sheet as a chart; `range` is shared by all panels of the sheet. */
function panelChart(canvas, sheet, panel, hidden, range) {
  const t = theme();
  const values = panel.lines.flatMap((l) => l.y.filter((v) => v !== null));
  const [low, high] = values.reduce(([a, b], v) => [Math.min(a, v), Math.max(b, v)], [Infinity, -Infinity]);
  const marks = {};
  sheet.shades.forEach((s, i) => {
    marks[`shade${i}`] = {
      type: 'box',
      xMin: s.from,
      xMax: s.to,
      backgroundColor: 'rgba(230, 159, 0, 0.16)',
      borderWidth: 0,
      drawTime: 'beforeDatasetsDraw',
      label: { display: true, content: String(i + 1), position: { x: 'center', y: 'start' }, color: t.text },
    };
  });
  panel.limits.forEach((l, i) => {
    marks[`limit${i}`] = {
      type: 'line',
      yMin: l.value,
      yMax: l.value,
      xMin: l.from,
      borderColor: t.limit,
      borderWidth: 1.5,
      borderDash: [3, 3],
      label: {
        display: true,
        content: l.label,
        position: 'end',
        backgroundColor: t.back,
        color: t.limit,
        padding: 2,
        font: { weight: 'bold' },
      },
    };
  });
  return new Chart(canvas, {
    type: 'line',
    data: {
      datasets: panel.lines.map((l) => ({
        label: l.label,
        data: l.x.map((x, i) => ({ x, y: l.y[i] })),
        borderColor: seen(l.colour),
        backgroundColor: seen(l.colour),
        borderDash: l.dash,
        borderWidth: 2,
        pointRadius: l.marks ? 4 : 0,
        showLine: !l.marks,
        hidden: hidden.has(l.label),
      })),
    },
    options: options(
      { label: `${sheet.axis} [${sheet.unit}]`, min: range.from, max: range.to },
      {
        label: `${panel.title} [${panel.unit || '-'}]`,
        // What is never negative has no room below zero.
        ...(low >= 0 && low < 0.5 * high ? { min: 0 } : {}),
        suggestedMax: high + 0.06 * Math.abs(high),
        afterFit(scale) {
          scale.width = 66;
        },
      },
      {
        plugins: {
          legend: { display: false },
          annotation: { annotations: marks },
          tooltip: {
            callbacks: {
              title: (items) => (items.length > 0 ? `${say(items[0].parsed.x)} ${sheet.unit}` : ''),
              label: (item) => `${item.dataset.label}: ${say(item.parsed.y)} ${panel.unit}`,
            },
          },
        },
      },
    ),
  });
}

/** Arrow keys move the shown values along a chart. */
function byKeys(canvas, chartOf) {
  canvas.tabIndex = 0;
  let at = 0;
  canvas.addEventListener('keydown', (e) => {
    if (e.key !== 'ArrowLeft' && e.key !== 'ArrowRight') return;
    e.preventDefault();
    const chart = chartOf();
    const first = chart.data.datasets.findIndex((_, i) => chart.isDatasetVisible(i));
    if (first < 0) return;
    const n = chart.data.datasets[first].data.length;
    const stride = Math.max(1, Math.round(n / 100));
    at = Math.min(n - 1, Math.max(0, at + (e.key === 'ArrowRight' ? stride : -stride)));
    const active = [{ datasetIndex: first, index: at }];
    chart.setActiveElements(active);
    chart.tooltip.setActiveElements(active, { x: 0, y: 0 });
    chart.update('none');
  });
}

function sheetFigure(sheet, number) {
  const whole = { from: sheet.begin, to: sheet.end };
  const range = { ...whole };
  const hidden = new Set();
  const holder = make('div', { class: 'panels' });
  const list = sheet.panels.map((panel) => {
    const canvas = make('canvas', {
      role: 'img',
      'aria-label': `${sheet.title}: ${panel.title} over time; the table below has the figures`,
    });
    const box = make('div', { class: panel.weight > 1 ? 'panel tall' : 'panel' }, canvas);
    holder.append(box);
    return { panel, canvas, chart: null };
  });
  const draw = () => {
    for (const q of list) {
      q.chart?.destroy();
      q.chart = panelChart(q.canvas, sheet, q.panel, hidden, range);
    }
  };
  const zoom = (from, to) => {
    const [a, b] = from < to ? [from, to] : [to, from];
    if (!(b > a)) return;
    range.from = Math.max(whole.from, a);
    range.to = Math.min(whole.to, b);
    inputs.from.value = say(range.from);
    inputs.to.value = say(range.to);
    for (const { chart } of list) {
      chart.options.scales.x.min = range.from;
      chart.options.scales.x.max = range.to;
      chart.update('none');
    }
  };
  const input = (name, value) =>
    make('input', { type: 'number', step: 'any', id: `${name}-${number}`, value: say(value) });
  const inputs = { from: input('from', whole.from), to: input('to', whole.to) };
  for (const e of Object.values(inputs))
    e.addEventListener('change', () => zoom(Number(inputs.from.value), Number(inputs.to.value)));
  const all = make('button', { type: 'button' }, 'whole span');
  all.addEventListener('click', () => zoom(whole.from, whole.to));
  const series = [...new Set(sheet.panels.flatMap((p) => p.lines.map((l) => l.label)))];
  const switches = series.map((label) => {
    const line = sheet.panels.flatMap((p) => p.lines).find((l) => l.label === label);
    const box = make('input', { type: 'checkbox', checked: '' });
    const swatch = make('span', { class: 'swatch', 'aria-hidden': 'true' });
    swatch.style.borderTopColor = seen(line.colour);
    swatch.style.borderTopStyle = line.dash.length === 0 ? 'solid' : line.dash[0] <= 3 ? 'dotted' : 'dashed';
    box.addEventListener('change', () => {
      if (box.checked) hidden.delete(label);
      else hidden.add(label);
      for (const { chart } of list)
        chart.data.datasets.forEach((d, i) => {
          if (d.label === label) chart.setDatasetVisibility(i, box.checked);
        });
      for (const { chart } of list) chart.update('none');
    });
    return make('label', { class: 'series' }, box, swatch, label);
  });
  for (const q of list) {
    byKeys(q.canvas, () => q.chart);
    let start = null;
    const valueAt = (e) =>
      q.chart.scales.x.getValueForPixel(e.clientX - q.canvas.getBoundingClientRect().left);
    q.canvas.addEventListener('pointerdown', (e) => {
      start = { x: e.clientX, value: valueAt(e) };
    });
    q.canvas.addEventListener('pointerup', (e) => {
      if (start && Math.abs(e.clientX - start.x) > 8) zoom(start.value, valueAt(e));
      start = null;
    });
    q.canvas.addEventListener('dblclick', () => zoom(whole.from, whole.to));
  }
  const details = make('details', {}, make('summary', {}, 'The figures as a table'));
  details.addEventListener('toggle', () => {
    if (details.children.length === 1) for (const p of sheet.panels) details.append(panelTable(sheet, p));
  });
  const figure = make(
    'figure',
    { class: 'sheet', 'data-name': sheet.name },
    make('figcaption', {}, make('h3', {}, sheet.title), ...sheet.answer.map((l) => make('p', {}, l))),
    make(
      'div',
      { class: 'controls' },
      make('label', { for: `from-${number}` }, 'from '),
      inputs.from,
      make('label', { for: `to-${number}` }, ' to '),
      inputs.to,
      make('span', {}, ` ${sheet.unit} `),
      all,
      make(
        'span',
        { class: 'hint' },
        'or drag across a chart; double-click shows the whole span; arrow keys read values',
      ),
    ),
    make('div', { class: 'switches' }, ...switches),
    holder,
    details,
  );
  charts.push({ draw, list: () => list.map((q) => q.chart) });
  return { figure, draw };
}

/** The lines of a panel at some sixty times, by straight lines between their points. */
function panelTable(sheet, panel) {
  const rows = 60;
  const at = (l, x) => {
    let k = l.x.findIndex((v) => v >= x);
    if (k < 0) k = l.x.length - 1;
    if (k === 0 || l.x[k] === x) return l.y[k];
    const share = (x - l.x[k - 1]) / (l.x[k] - l.x[k - 1]);
    return l.y[k - 1] + share * (l.y[k] - l.y[k - 1]);
  };
  const head = [
    `${sheet.axis} [${sheet.unit}]`,
    ...panel.lines.map((l) => `${l.label} [${panel.unit || '-'}]`),
  ];
  const body = Array.from({ length: rows + 1 }, (_, i) => {
    const x = sheet.begin + ((sheet.end - sheet.begin) * i) / rows;
    return [x, ...panel.lines.map((l) => at(l, x))].map(say);
  });
  return table(head, body, `${sheet.title}: ${panel.title}`);
}

function table(head, body, caption) {
  const t = make(
    'table',
    {},
    make('caption', {}, caption),
    make('thead', {}, make('tr', {}, ...head.map((h) => make('th', { scope: 'col' }, h)))),
    make('tbody', {}, ...body.map((r) => make('tr', {}, ...r.map((c) => make('td', {}, c))))),
  );
  sortable(t);
  return make('div', { class: 'wide' }, t);
}

/** A heading sorts its table, by click or by Enter: by number where all cells are numbers, else by text. */
function sortable(t) {
  const heads = [...t.tHead.rows[0].cells];
  heads.forEach((th, k) => {
    const button = make('button', { type: 'button', class: 'sort' }, ...th.childNodes);
    th.replaceChildren(button);
    button.addEventListener('click', () => {
      const up = th.getAttribute('aria-sort') !== 'ascending';
      for (const h of heads) h.removeAttribute('aria-sort');
      th.setAttribute('aria-sort', up ? 'ascending' : 'descending');
      const body = t.tBodies[0];
      const value = (r) => r.cells[k].dataset.value ?? r.cells[k].textContent;
      const rows = [...body.rows];
      const numeric = rows.every((r) => value(r) === '–' || Number.isFinite(Number(value(r))));
      const number = (r) => (value(r) === '–' ? Number.NEGATIVE_INFINITY : Number(value(r)));
      rows.sort(
        (a, b) => (numeric ? number(a) - number(b) : value(a).localeCompare(value(b))) * (up ? 1 : -1),
      );
      body.append(...rows);
    });
  });
}

/** Stage profiles and operating diagrams at a moment that a slider chooses. */
function momentSection(frames) {
  const slider = make('input', {
    type: 'range',
    min: '0',
    max: String(frames.times.length - 1),
    step: '1',
    value: '0',
    id: 'moment',
    'aria-label': 'moment of the run',
  });
  const shown = make('output', { for: 'moment', id: 'moment-time' });
  const grid = make('div', { class: 'moments' });
  const pairs = frames.trains.map((t) => {
    const canvases = ['profile', 'diagram'].map((what) =>
      make('canvas', {
        role: 'img',
        'aria-label': `${t.train}, ${t.solute}: ${what === 'profile' ? 'profile along the stages' : 'operating diagram'}`,
        'data-kind': what,
      }),
    );
    grid.append(
      make(
        'div',
        { class: 'pair' },
        make('h3', {}, `${t.train}: ${t.solute}`),
        ...canvases.map((c) => make('div', { class: 'panel tall' }, c)),
      ),
    );
    return { t, canvases, charts: [] };
  });
  const line = (label, colour, points, more = {}) => ({
    label,
    data: points,
    borderColor: seen(colour),
    backgroundColor: seen(colour),
    borderWidth: 2,
    pointRadius: 4,
    ...more,
  });
  const pointsOf = (list) => list.map(([x, y]) => ({ x, y }));
  const sets = (t, k) => [
    [
      line(
        'aqueous',
        '#0072B2',
        t.profile.aqueous[k].map((y, j) => ({ x: j + 1, y })),
      ),
      line(
        'organic',
        '#D55E00',
        t.profile.organic[k].map((y, j) => ({ x: j + 1, y })),
        { borderDash: [9, 4] },
      ),
    ],
    [
      line('equilibrium', '#009E73', pointsOf(t.diagram[k].isotherm), { pointRadius: 0 }),
      line('operating line', '#0072B2', pointsOf(t.diagram[k].operating), {
        borderDash: [9, 4],
        spanGaps: false,
      }),
      line('mixers', '#D55E00', pointsOf(t.diagram[k].stages), {
        showLine: false,
        pointStyle: 'rect',
        pointRadius: 5,
      }),
    ],
  ];
  const draw = () => {
    const k = Number(slider.value);
    for (const p of pairs) {
      for (const c of p.charts) c.destroy();
      const [profile, diagram] = sets(p.t, k);
      const tip = (unitX, unitY) => ({
        legend: { display: true, labels: { color: theme().text, usePointStyle: true } },
        tooltip: {
          callbacks: {
            title: () => '',
            label: (i) => `${i.dataset.label}: ${say(i.parsed.x)}${unitX}, ${say(i.parsed.y)}${unitY}`,
          },
        },
      });
      p.charts = [
        new Chart(p.canvases[0], {
          type: 'line',
          data: { datasets: profile },
          options: options(
            {
              label: 'stage (1 = where the aqueous enters)',
              ticks: {
                stepSize: 1,
                callback: (v) => (Number.isInteger(v) && v >= 1 && v <= p.t.stages ? v : ''),
              },
              min: 0.5,
              max: p.t.stages + 0.5,
            },
            { label: `${p.t.solute} leaving the stage [g/L]`, min: 0, max: p.t.most },
            { plugins: tip('', ' g/L') },
          ),
        }),
        new Chart(p.canvases[1], {
          type: 'line',
          data: { datasets: diagram },
          options: options(
            { label: `aqueous ${p.t.solute} [g/L]`, min: 0, max: p.t.reach[0] },
            { label: `organic ${p.t.solute} [g/L]`, min: 0, max: p.t.reach[1] },
            { interaction: { mode: 'nearest', intersect: false }, plugins: tip(' g/L', ' g/L') },
          ),
        }),
      ];
    }
    shown.textContent = `${say(frames.times[k])} ${frames.unit}`;
  };
  slider.addEventListener('input', () => {
    const k = Number(slider.value);
    for (const p of pairs)
      sets(p.t, k).forEach((list, i) => {
        p.charts[i].data.datasets.forEach((d, j) => {
          d.data = list[j].data;
        });
        p.charts[i].update('none');
      });
    shown.textContent = `${say(frames.times[k])} ${frames.unit}`;
  });
  slider.value = String(frames.times.length - 1);
  const details = make('details', {}, make('summary', {}, 'The profiles as a table'));
  details.addEventListener('toggle', () => {
    if (details.children.length > 1) return;
    for (const { t } of pairs)
      details.append(
        table(
          [
            'time',
            ...Array.from({ length: t.stages }, (_, j) => [`aqueous ${j + 1}`, `organic ${j + 1}`]).flat(),
          ],
          frames.times.map((time, k) => [
            say(time),
            ...t.profile.aqueous[k].flatMap((v, j) => [say(v), say(t.profile.organic[k][j])]),
          ]),
          `${t.train}: ${t.solute} leaving the stages [g/L] over time [${frames.unit}]`,
        ),
      );
  });
  charts.push({ draw, list: () => pairs.flatMap((p) => p.charts) });
  const section = make(
    'section',
    { id: 'moments' },
    make('h2', {}, 'Stages at a moment'),
    make('div', { class: 'controls' }, make('label', { for: 'moment' }, 'moment '), slider, shown),
    grid,
    details,
  );
  return { section, draw };
}

const place = document.getElementById('charts');
for (const [i, sheet] of data.sheets.entries()) {
  const { figure, draw } = sheetFigure(sheet, i);
  place.append(figure);
  draw();
}
if (data.frames) {
  const { section, draw } = momentSection(data.frames);
  place.after(section);
  draw();
}
for (const t of document.querySelectorAll('table.sortable')) sortable(t);

const again = () => {
  for (const c of charts) c.draw();
};
matchMedia('(prefers-color-scheme: dark)').addEventListener('change', again);
addEventListener('beforeprint', () => {
  onPaper = true;
  again();
  for (const c of charts)
    for (const chart of c.list()) chart.resize(Math.min(640, chart.width), chart.height);
});
addEventListener('afterprint', () => {
  onPaper = false;
  again();
});
window.upsettle = { charts: () => charts.flatMap((c) => c.list()), ready: true };
