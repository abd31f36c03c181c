'use strict';
// Draws the page's charts from their options and wires keys, zoom, tooltips and printing.
(function () {
  if (typeof echarts === 'undefined') return;

  // number words v with at most n significant digits: 0.0001, 1.5·10⁻⁵.
  function number(v, n) {
    if (v === 0) return '0';
    const a = Math.abs(v);
    if (a >= 1e-4 && a < 1e5) return String(Number(v.toPrecision(n))).replace('-', '−');
    const [m, e] = v.toExponential(n - 1).split('e');
    const power = '10' + String(Number(e)).replace(/./g, c => '⁰¹²³⁴⁵⁶⁷⁸⁹⁻'['0123456789-'.indexOf(c)]);
    const mantissa = String(Number(m)).replace('-', '−');
    return mantissa === '1' ? power : mantissa + '·' + power;
  }

  function label(axis) { return v => number(v / axis.scale, 5); }

  // logTicks returns readable places between low and high: 1-2-5 steps, or whole decades over a wide range.
  function logTicks(low, high, room) {
    const decades = Math.log10(high / low);
    const steps = decades * 3 <= room ? [1, 2, 5] : decades * 2 <= room ? [1, 3] : [1];
    const every = Math.max(1, Math.ceil(decades / room));
    const out = [];
    for (let d = Math.floor(Math.log10(low)); d <= Math.ceil(Math.log10(high)); d++) {
      if (d % every) continue;
      for (const s of steps) {
        const v = Number(s + 'e' + d);
        if (v >= low * (1 - 1e-9) && v <= high * (1 + 1e-9)) out.push(v);
      }
    }
    return out;
  }

  // at returns the value of a series at x, or null outside it: held, interpolated, or the nearest dot.
  function at(series, x, log) {
    const d = series.points;
    if (!d.length || x < d[0][0] || x > d[d.length - 1][0]) return null;
    let i = 0, j = d.length - 1;
    while (j - i > 1) { const m = (i + j) >> 1; if (d[m][0] <= x) i = m; else j = m; }
    if (d[j][0] <= x) return d[j][1];
    if (series.step) return d[i][1];
    if (series.type === 'scatter') return x - d[i][0] <= d[j][0] - x ? d[i][1] : d[j][1];
    const f = log ? Math.log(x / d[i][0]) / Math.log(d[j][0] / d[i][0]) : (x - d[i][0]) / (d[j][0] - d[i][0]);
    return f > 0 ? d[i][1] + f * (d[j][1] - d[i][1]) : d[i][1];
  }

  function element(tag, text, parent) {
    const e = document.createElement(tag);
    if (text) e.textContent = text;
    if (parent) parent.appendChild(e);
    return e;
  }

  // swatchOf returns a copy of the swatch beside the curve's name, so that text and line go together.
  function swatchOf(group, name) {
    for (const k of document.querySelectorAll('.key')) {
      if (k.dataset.group === group && k.dataset.curve === name) return k.querySelector('svg').cloneNode(true);
    }
    return null;
  }

  const unitText = axis => axis.unit ? ' ' + axis.unit : '';

  // tip builds the tooltip as elements, never as HTML text: names are the user's.
  function tip(c, x) {
    const box = element('div');
    box.className = 'tip';
    element('b', c.x.quantity + ' ' + number(x / c.x.scale, 6) + unitText(c.x), box);
    const table = element('table', '', box);
    const hidden = c.chart.getOption().legend[0].selected || {};
    for (const s of c.option.series) {
      if (!s.name || hidden[s.name] === false) continue;
      const v = at(s, x, c.x.log);
      if (v === null) continue;
      const row = element('tr', '', table), name = element('td', '', row);
      const mark = swatchOf(c.group, s.name);
      if (mark) name.appendChild(mark);
      name.appendChild(document.createTextNode(s.name));
      element('td', number(v / c.y.scale, 6) + unitText(c.y), row);
    }
    return box;
  }

  // point is the tooltip of a pole or of a bar.
  function point(c, p) {
    const box = element('div'), v = p.value;
    box.className = 'tip';
    element('b', p.seriesName, box);
    if (c.option.yAxis[0].type === 'category') {
      element('div', c.option.yAxis[0].data[v[1]], box);
      element('div', number(v[0], 6) + ' Hz', box);
    } else {
      element('div', number(v[0], 6) + (v[1] < 0 ? ' − ' : ' + ') + number(Math.abs(v[1]), 6) + 'j' + unitText(c.x), box);
    }
    return box;
  }

  // prepare adds to the options what JSON cannot hold: functions.
  function prepare(c) {
    const o = c.option, single = c.id === 'closed-poles' || c.id === 'rate-window';
    for (const s of o.series) s.points = (s.data || []).map(d => d.value || d);
    o.xAxis[0].axisLabel.formatter = label(c.x);
    if (o.yAxis[0].type !== 'category') o.yAxis[0].axisLabel.formatter = label(c.y);
    o.tooltip.trigger = single ? 'item' : 'axis';
    o.tooltip.formatter = p => single ? point(c, p) : tip(c, p[0].axisValue);
    o.tooltip.axisPointer.label = { formatter: p => number(p.value / (p.axisDimension === 'x' ? c.x : c.y).scale, 5) };
  }

  // scales places the ticks of logarithmic axes for the part that is in view.
  function scales(c) {
    const o = c.chart.getOption(), set = {}, width = c.chart.getWidth();
    for (const [name, axis, room] of [['xAxis', c.x, Math.max(3, width / 70)], ['yAxis', c.y, 7]]) {
      const a = o[name][0];
      if (!axis.log || !(a.min > 0)) continue;
      const z = name === 'xAxis' && o.dataZoom[0] || { start: 0, end: 100 };
      const low = Math.log(a.min), span = Math.log(a.max) - low;
      const ticks = logTicks(Math.exp(low + span * z.start / 100), Math.exp(low + span * z.end / 100), room);
      if (ticks.length < 2) continue;
      set[name] = [{ axisTick: { customValues: ticks }, axisLabel: { customValues: ticks } }];
    }
    return set;
  }

  // narrow gives a small screen its room: short rows of names, fewer tools.
  function narrow(c) {
    const small = c.chart.getWidth() < 520, o = c.option;
    const set = { toolbox: [{ show: !small }], yAxis: [{}] };
    if (o.yAxis[0].type === 'category') set.yAxis[0].axisLabel = { width: small ? 150 : 190 };
    return set;
  }

  const charts = [];

  function fit(c) {
    c.chart.setOption(narrow(c));
    c.chart.setOption(scales(c));
  }

  // link repeats a zoom in x in the other charts of the section.
  let linking = false;
  function link(c) {
    c.chart.setOption(scales(c));
    if (linking) return;
    linking = true;
    const z = c.chart.getOption().dataZoom[0];
    for (const other of charts) {
      if (other === c || other.group !== c.group) continue;
      other.chart.dispatchAction({ type: 'dataZoom', dataZoomIndex: 0, start: z.start, end: z.end });
    }
    linking = false;
  }

  for (const c of drawings) {
    const place = document.getElementById(c.id);
    place.textContent = '';
    c.chart = echarts.init(place, null, { renderer: 'svg' });
    prepare(c);
    c.chart.setOption(c.option);
    charts.push(c);
    fit(c);
    c.chart.on('datazoom', () => link(c));
    c.chart.on('restore', () => { fit(c); link(c); });
    new ResizeObserver(() => {
      if (printing || place.clientWidth === c.chart.getWidth()) return;
      c.chart.resize();
      fit(c);
    }).observe(place);
  }

  document.addEventListener('click', e => {
    const key = e.target.closest && e.target.closest('.key');
    if (!key) return;
    const shown = key.getAttribute('aria-pressed') !== 'true';
    key.setAttribute('aria-pressed', String(shown));
    for (const c of charts) {
      if (c.group === key.dataset.group) {
        c.chart.dispatchAction({ type: shown ? 'legendSelect' : 'legendUnSelect', name: key.dataset.curve });
      }
    }
  });

  // On paper a chart is as wide as the sheet, has no handles, and is lower than on the screen, so that an
  // input's table and charts fill one page.
  var printing = false;
  const paperWidth = 690; // A4 less the margins, in pixels of 1/96 inch: (210 − 26) mm = 695
  function forPaper(on) {
    printing = on;
    for (const c of charts) {
      const input = c.group.startsWith('input-'), grid = c.option.grid[0] || c.option.grid;
      const height = parseInt(document.getElementById(c.id).style.height, 10);
      c.chart.resize(on ? { width: paperWidth, height: Math.round(height * (input ? 0.6 : 0.74)) } : { width: 'auto', height: 'auto' });
      c.chart.setOption({
        dataZoom: c.option.dataZoom.map(z => z.type === 'slider' ? { show: !on } : {}),
        toolbox: [{ show: !on }], grid: { bottom: on ? 24 : grid.bottom, top: on && input ? 28 : grid.top },
        yAxis: [{ nameGap: on && input ? 8 : c.option.yAxis[0].nameGap }],
      });
      if (!on) fit(c);
    }
  }
  window.addEventListener('beforeprint', () => forPaper(true));
  window.addEventListener('afterprint', () => forPaper(false));
})();
