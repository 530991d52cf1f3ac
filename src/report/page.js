'use strict';
(() => {
  const data = JSON.parse(document.getElementById('data').textContent);
  const byId = id => document.getElementById(id);
  const SVG = 'http://www.w3.org/2000/svg';
  let chosen = 0;
  let zoom = 'near';
  const axes = data.axes.map((name, axis) => {
    const index = data.figures.findIndex(figure => figure.name === name);
    return index < 0 ? Math.min(axis, data.figures.length - 1) : index;
  });
  const firstAxes = [...axes];

  // ---- elements -------------------------------------------------------------------------

  const fill = (element, attributes, children) => {
    for (const [name, value] of Object.entries(attributes || {})) {
      if (value !== null && value !== undefined && value !== false) element.setAttribute(name, value);
    }
    for (const child of children) {
      if (child !== null && child !== undefined) element.append(child);
    }
    return element;
  };
  const el = (tag, attributes, ...children) => fill(document.createElement(tag), attributes, children);
  const draw = (tag, attributes, ...children) => fill(document.createElementNS(SVG, tag), attributes, children);
  const px = value => Math.round(value * 10) / 10;
  const word = (x, y, text, attributes) => draw('text', { x: px(x), y: px(y), ...attributes }, text);
  const line = (className, d) => draw('path', { class: className, d });

  const measure = (() => {
    const context = document.createElement('canvas').getContext('2d');
    return (text, size = 12, weight = 400) => {
      context.font = `${weight} ${size}px ${getComputedStyle(document.body).fontFamily}`;
      return context.measureText(text).width;
    };
  })();

  // ---- axes -----------------------------------------------------------------------------

  const printed = unit => unit.replace('Ohm', 'Ω').replace('m2', 'm²');

  // Scale and name of the unit in which SI values up to `largest` are drawn.
  const drawnUnit = (largest, unit) => {
    if (unit === 'm2') return [1e12, 'µm²'];
    if (unit === '1') return [100, '%'];
    if (unit === 'V') return [1, 'V'];
    const prefixes = [[1e9, 'G'], [1e6, 'M'], [1e3, 'k'], [1, ''], [1e-3, 'm'], [1e-6, 'µ'], [1e-9, 'n']];
    const [size, prefix] = prefixes.find(([size]) => largest >= size) || [1e-12, 'p'];
    return [1 / size, prefix + printed(unit)];
  };

  const roundStep = raw => {
    const power = 10 ** Math.floor(Math.log10(raw));
    return ([1, 2, 2.5, 5].find(round => raw / power <= round * (1 + 1e-9)) || 10) * power;
  };

  // Ticks at round values inside [least, most], with labels of one length.
  const ticks = (least, most, count) => {
    const step = roundStep((most - least) / Math.max(count, 1));
    let decimals = Math.max(0, -Math.floor(Math.log10(step)));
    const mantissa = step * 10 ** decimals;
    if (Math.abs(mantissa - Math.round(mantissa)) > 1e-6) decimals += 1;
    const list = [];
    for (let index = Math.ceil(least / step - 1e-6); index * step <= most + 1e-6 * step; index += 1) {
      const value = index * step;
      let text = Math.abs(value) < 1e-9 * step ? (0).toFixed(decimals) : value.toFixed(decimals);
      text = text.replace('-', '−').replace(/\B(?=(\d{3})+(?!\d))(?<!\.\d*)/g, '\u202f');
      list.push([value, text]);
    }
    return { list, step };
  };

  // ---- the front ------------------------------------------------------------------------

  const around = (values, unit, count) => {
    const finite = values.filter(value => value !== null);
    let least = Math.min(...finite), most = Math.max(...finite);
    if (!finite.length) [least, most] = [0, 1];
    const [scale, name] = drawnUnit(Math.max(Math.abs(least), Math.abs(most)), unit);
    least *= scale;
    most *= scale;
    const span = Math.max(most - least, 0.02 * Math.max(Math.abs(least), Math.abs(most)), 1e-9);
    const middle = (least + most) / 2, positive = least >= 0;
    least = middle - 0.56 * span;
    most = middle + 0.56 * span;
    if (positive) least = Math.max(least, 0);
    const step = roundStep((most - least) / count);
    least = Math.floor(least / step) * step;
    most = Math.ceil(most / step) * step;
    return { least, most, scale, name, ...ticks(least, most, (most - least) / step) };
  };

  const label = figure => {
    const text = data.figures[figure].label;
    return text[0].toUpperCase() + text.slice(1);
  };

  function drawFront() {
    const place = byId('chart');
    const width = Math.max(280, Math.floor(place.clientWidth || 560));
    const height = Math.max(280, Math.min(400, Math.round(width * 0.6)));
    const [across, up] = axes.map(index => data.figures[index]);
    const value = (network, axis) => network.values[axes[axis]];
    const horizontal = around(data.networks.map(n => value(n, 0)), across.unit, Math.max(2, Math.floor(width / 110)));
    const vertical = around(data.networks.map(n => value(n, 1)), up.unit, Math.max(2, Math.floor(height / 60)));
    const left = 14 + Math.max(...vertical.list.map(([, text]) => measure(text)));
    const right = width - Math.max(14, 3 + measure(horizontal.list[horizontal.list.length - 1][1]) / 2);
    const top = 30, bottom = height - 40;
    const x = drawn => left + (drawn - horizontal.least) / (horizontal.most - horizontal.least) * (right - left);
    const y = drawn => bottom - (drawn - vertical.least) / (vertical.most - vertical.least) * (bottom - top);
    const picture = draw('svg', { class: 'chart', viewBox: `0 0 ${width} ${height}`, width, height,
      role: 'group', 'aria-label': `The front: ${up.label} against ${across.label}` });
    for (const [at, text] of horizontal.list) {
      picture.append(line('grid', `M${px(x(at))} ${top}V${bottom}`), word(x(at), bottom + 16, text, { 'text-anchor': 'middle' }));
    }
    for (const [at, text] of vertical.list) {
      picture.append(line('grid', `M${px(left)} ${px(y(at))}H${px(right)}`), word(left - 7, y(at) + 4, text, { 'text-anchor': 'end' }));
    }
    picture.append(line('axis', `M${px(left)} ${top}V${bottom}H${px(right)}`),
      word(right, height - 6, `${across.label}, ${horizontal.name}`, { class: 'name', 'text-anchor': 'end' }),
      word(2, 14, `${up.label}, ${vertical.name}`, { class: 'name' }));
    if (across.limit !== null) {
      const at = across.limit * horizontal.scale;
      if (at >= horizontal.least && at <= horizontal.most) {
        picture.append(line('limit', `M${px(x(at))} ${top}V${bottom}`), word(x(at) - 5, top + 12, 'limit', { class: 'limit-name', 'text-anchor': 'end' }));
      }
    }
    if (up.limit !== null) {
      const at = up.limit * vertical.scale;
      if (at >= vertical.least && at <= vertical.most) {
        picture.append(line('limit', `M${px(left)} ${px(y(at))}H${px(right)}`), word(right - 5, y(at) - 5, 'limit', { class: 'limit-name', 'text-anchor': 'end' }));
      }
    }
    const points = data.networks
      .map((network, index) => ({ network, index, a: value(network, 0), b: value(network, 1) }))
      .filter(point => point.a !== null && point.b !== null)
      .map(point => ({ ...point, x: x(point.a * horizontal.scale), y: y(point.b * vertical.scale) }));
    const asTraded = axes.every((axis, index) => axis === firstAxes[index]);
    if (points.length > 1 && data.two_axes && asTraded) {
      const order = [...points].sort((p, q) => p.x - q.x || q.y - p.y);
      picture.append(line('steps', order.map((p, index) => index ? `H${px(p.x)}V${px(p.y)}` : `M${px(p.x)} ${px(p.y)}`).join('')));
    }
    // A label goes where no earlier point or label is; a crowded one waits for its hint.
    const taken = points.map(p => [p.x - 6, p.y - 6, p.x + 6, p.y + 6]);
    const free = box => !taken.some(t => box[0] < t[2] && box[2] > t[0] && box[1] < t[3] && box[3] > t[1]);
    for (const point of points) {
      const { network, index } = point;
      const wide = measure(network.rank);
      const spots = [[point.x + 8, point.y - 6], [point.x - 8 - wide, point.y + 14], [point.x + 8, point.y + 14], [point.x - 8 - wide, point.y - 6]];
      const spot = spots.find(([sx, sy]) => sx >= left && sx + wide <= width && free([sx, sy - 10, sx + wide, sy + 1]));
      if (spot) taken.push([spot[0], spot[1] - 10, spot[0] + wide, spot[1] + 1]);
      const mark = draw('g', { class: 'point', 'data-index': index, tabindex: 0, role: 'button',
        'aria-label': `${network.title}: ${network.summary.map(pair => pair.join(' ')).join('; ')}` },
        draw('circle', { class: 'halo', cx: px(point.x), cy: px(point.y), r: 12 }),
        draw('circle', { class: 'ring', cx: px(point.x), cy: px(point.y), r: 9 }),
        draw('circle', { class: 'dot', cx: px(point.x), cy: px(point.y), r: 5 }),
        spot ? word(spot[0], spot[1], network.rank) : null);
      mark.addEventListener('click', () => choose(index));
      mark.addEventListener('keydown', event => {
        if (event.key === 'Enter' || event.key === ' ') { event.preventDefault(); choose(index); }
        const way = { ArrowRight: 1, ArrowDown: 1, ArrowLeft: -1, ArrowUp: -1 }[event.key];
        if (way) {
          event.preventDefault();
          const marks = [...picture.querySelectorAll('.point')];
          const next = marks[marks.indexOf(mark) + way];
          if (next) next.focus();
        }
      });
      const show = () => hint(point, width);
      mark.addEventListener('pointerenter', show);
      mark.addEventListener('focus', show);
      mark.addEventListener('pointerleave', hideHint);
      mark.addEventListener('blur', hideHint);
      picture.append(mark);
    }
    place.replaceChildren(picture);
    markChosen();
  }

  function hint(point, width) {
    const box = byId('hint'), chart = byId('chart');
    box.replaceChildren(el('b', null, point.network.title), el('dl', null,
      ...point.network.summary.map(([name, text]) => el('div', null, el('dt', null, name), el('dd', null, text)))));
    box.hidden = false;
    const leftmost = chart.offsetLeft, wide = box.offsetWidth, high = box.offsetHeight;
    // Where less is better on both axes nothing lies above and to the right of a point of the
    // front, nor below and to its left.
    let x = point.x + 14, y = Math.max(-24, point.y - 12 - high);
    if (x + wide > width) {
      x = point.x - 14 - wide;
      y = point.y + 12;
      if (x < 0) {
        x = Math.max(0, Math.min(width - wide, point.x - wide / 2));
        if (point.y - 14 - high > -chart.offsetTop) y = point.y - 14 - high;
      }
    }
    box.style.left = `${leftmost + x}px`;
    box.style.top = `${chart.offsetTop + y}px`;
    mark('near', point.index, true);
  }
  function hideHint() {
    byId('hint').hidden = true;
    for (const element of document.querySelectorAll('.near')) element.classList.remove('near');
  }

  function mark(name, index, also) {
    for (const element of document.querySelectorAll(`.point[data-index="${index}"], #ranked tr[data-index="${index}"]`)) {
      element.classList.toggle(name, also);
    }
  }
  function markChosen() {
    for (const element of document.querySelectorAll('.point, #ranked tbody tr')) {
      const here = Number(element.dataset.index) === chosen;
      element.classList.toggle('chosen', here);
      if (element.classList.contains('point')) element.setAttribute('aria-pressed', here);
      const button = element.querySelector('button');
      if (button) button.setAttribute('aria-pressed', here);
    }
  }

  // ---- the tree of families -------------------------------------------------------------

  // Sources hang from the supply rail, sinks stand on ground; what feeds what runs in between.
  function drawTree(network) {
    const place = byId('tree');
    const BOX = 60, LINE = 18, PORT = 52;
    const families = network.tree.map(family => ({ ...family }));
    const named = new Map(families.map(family => [family.name, family]));
    for (const family of families) {
      family.parent = named.get(family.fed_by) || null;
      family.children = families.filter(child => child.fed_by === family.name);
      const texts = [measure(`${family.name}  ${family.cell}`, 12, 600) + 22, measure(family.input) + 22, measure(family.area) + 22,
        ...family.outputs.map(([name, text]) => measure(`${name}  ${text}`) + 34 + PORT)];
      family.width = Math.ceil(Math.max(150, ...texts));
      family.height = BOX + family.outputs.length * LINE + (family.outputs.length ? 8 : 0);
    }
    // Rows in the order of a walk along the tree.
    const rows = { true: [], false: [] };
    const walk = family => { rows[family.source].push(family); family.children.forEach(walk); };
    families.filter(family => !family.parent).forEach(walk);
    const referenceWidth = Math.ceil(measure(network.reference, 12, 600)) + 26;
    const room = byId('network').clientWidth - 2 - 40;
    const widths = row => row.reduce((sum, family) => sum + family.width, 0);
    const gaps = [rows.true, rows.false].filter(row => row.length > 1).map(row => (room - widths(row)) / (row.length - 1));
    const GAP = Math.floor(Math.max(10, Math.min(26, ...gaps)));
    const total = row => row.reduce((sum, family) => sum + family.width + GAP, -GAP);
    const span = Math.max(total(rows.true), total(rows.false));
    const [base, other] = total(rows.true) >= total(rows.false) ? [rows.true, rows.false] : [rows.false, rows.true];
    const SIDE = 20;
    const width = Math.floor(Math.max(byId('network').clientWidth - 2, span + 2 * SIDE, referenceWidth + 2 * SIDE));
    const MARGIN = Math.floor((width - span) / 2);
    let x = MARGIN;
    for (const family of base) { family.x = x; x += family.width + GAP; }
    // The shorter row: each family as near to what it is wired to as its neighbours allow.
    let from = MARGIN;
    for (const family of other) {
      const wired = [family.parent, ...family.children].filter(peer => peer && peer.x !== undefined && peer.source !== family.source);
      const wish = wired.length ? wired.reduce((sum, peer) => sum + peer.x + peer.width / 2, 0) / wired.length - family.width / 2 : from;
      family.x = Math.max(from, wish);
      from = family.x + family.width + GAP;
    }
    let to = MARGIN + span;
    for (const family of [...other].reverse()) {
      family.x = Math.max(MARGIN, Math.min(family.x, to - family.width));
      to = family.x - GAP;
    }
    const highest = row => Math.max(0, ...row.map(family => family.height));
    const feeding = families.filter(family => family.children.length);
    const channel = 34 + 14 * feeding.length + 14;
    const railTop = 34, railBottom = railTop + 14 + highest(rows.true) + channel + highest(rows.false) + 14;
    const height = railBottom + 30;
    const middle = railTop + 14 + highest(rows.true);

    const picture = draw('svg', { viewBox: `0 0 ${width} ${height}`, width, height, role: 'img',
      'aria-label': 'Which family feeds which; the same stands in the table of families below' });
    picture.append(
      line('rail', `M${SIDE} ${railTop}H${width - SIDE}`), word(SIDE, railTop - 8, 'supply', { class: 'soft' }),
      line('rail', `M${SIDE} ${railBottom}H${width - SIDE}`), word(SIDE, railBottom + 18, 'ground', { class: 'soft' }));

    // Ports: a place across for every wire, none of them shared.
    const used = [];
    const port = at => {
      while (used.some(other => Math.abs(other - at) < 6)) at -= 6;
      used.push(at);
      return at;
    };
    const edge = family => family.source ? railTop + 14 + BOX : railBottom - 14 - BOX;
    for (const family of families) {
      family.entry = port(family.x + family.width - 34);
      family.exit = family.children.length ? port(family.x + family.width - 14) : null;
    }
    const arrow = (at, y, up, className) => draw('path', { class: className, d: `M${px(at - 4)} ${px(y + (up ? 8 : -8))}L${px(at)} ${px(y)}L${px(at + 4)} ${px(y + (up ? 8 : -8))}Z` });
    const wires = draw('g');
    let track = middle + 34;
    for (const family of feeding) {
      const kind = family.source ? 'source' : 'sink';
      const ends = [family.exit, ...family.children.map(child => child.entry)];
      wires.append(line(`wire ${kind}`, `M${px(family.exit)} ${px(edge(family))}V${track}`),
        line(`wire ${kind}`, `M${px(Math.min(...ends))} ${track}H${px(Math.max(...ends))}`));
      const inner = ends.filter(at => at > Math.min(...ends) && at < Math.max(...ends));
      for (const at of inner) wires.append(draw('circle', { class: `${kind}-fill`, cx: px(at), cy: track, r: 2.5 }));
      for (const child of family.children) {
        const end = edge(child);
        wires.append(line(`wire ${kind}`, `M${px(child.entry)} ${track}V${px(end)}`), arrow(child.entry, end, child.source, `${kind}-fill`));
      }
      track += 14;
    }
    for (const root of families.filter(family => !family.parent)) {
      // The reference comes in above or below all tracks, on the side of its family.
      const y = root.source ? middle + 18 : middle + channel - 12;
      const start = Math.max(SIDE, Math.min(root.entry - referenceWidth, width - SIDE - referenceWidth));
      picture.append(word(start, y + 4, network.reference, { style: 'font-weight:600' }));
      wires.append(line('wire ink', `M${px(start + referenceWidth - 18)} ${y}H${px(root.entry)}V${px(edge(root))}`), arrow(root.entry, edge(root), root.source, 'ink-fill'));
    }
    picture.append(wires);

    for (const family of families) {
      const kind = family.source ? 'source' : 'sink';
      const top = family.source ? railTop + 14 : railBottom - 14 - BOX;
      const stem = family.x + family.width / 2;
      picture.append(line(`wire ${kind}`, family.source ? `M${px(stem)} ${railTop}V${top}` : `M${px(stem)} ${top + BOX}V${railBottom}`),
        draw('rect', { class: `box ${kind}`, x: px(family.x), y: px(top), width: family.width, height: BOX }),
        draw('text', { x: px(family.x + 11), y: px(top + 18) }, draw('tspan', { style: 'font-weight:600' }, family.name), draw('tspan', { dx: 8 }, family.cell)),
        word(family.x + 11, top + 35, family.input, { class: 'soft' }),
        word(family.x + 11, top + 51, family.area, { class: 'soft' }));
      const away = family.source ? 1 : -1, start = family.source ? top + BOX : top;
      const trunk = family.x + 13;
      family.outputs.forEach(([name, text], index) => {
        const y = start + away * (LINE * (index + 1) - 2);
        const head = family.source ? `M${trunk + 16} ${y - 4}L${trunk + 23} ${y}L${trunk + 16} ${y + 4}Z` : `M${trunk + 13} ${y - 4}L${trunk + 6} ${y}L${trunk + 13} ${y + 4}Z`;
        picture.append(line(`wire ${kind}`, `M${px(trunk)} ${start}V${y}H${px(trunk + 20)}`), draw('path', { class: `${kind}-fill`, d: head }),
          draw('a', { href: `#leg-${name}` }, draw('text', { x: px(trunk + 28), y: px(y + 4) }, draw('tspan', null, name), draw('tspan', { class: 'soft', dx: 7 }, text))));
      });
    }
    place.replaceChildren(picture);
  }

  // ---- one output: its curve and its budget ---------------------------------------------

  const fixed = (value, digits) => (Number.isFinite(value) ? value.toFixed(digits) : '–').replace('-', '−');

  function drawCurve(leg, width, reading) {
    const height = 198, top = 18, bottom = height - 32;
    const [scale, unit] = drawnUnit(leg.target, 'A');
    const target = leg.target * scale, limit = leg.error_limit;
    const inRange = leg.volts.map((v, index) => index).filter(index => leg.volts[index] >= leg.range[0] - 1e-9 && leg.volts[index] <= leg.range[1] + 1e-9);
    const spread = Math.max(0.001, ...inRange.map(index => Math.max(Math.abs(leg.most[index] / leg.target - 1), Math.abs(leg.least[index] / leg.target - 1))));
    let least = 0, most = 1.12 * Math.max(target * (1 + (limit || 0)), ...leg.most.map(i => i * scale));
    if (zoom === 'near') {
      const half = Math.max(1.35 * (limit || 0), 1.15 * spread);
      [least, most] = [Math.max(0, target * (1 - 1.8 * half)), target * (1 + 1.2 * half)];
    }
    const vMost = Math.max(leg.range[1], leg.volts[leg.volts.length - 1] || 0);
    const vertical = ticks(least, most, 4);
    const left = 12 + Math.max(...vertical.list.map(([, text]) => measure(text, 11))), right = width - 8;
    const x = v => left + v / vMost * (right - left);
    const y = drawn => bottom - (drawn - least) / (most - least) * (bottom - top);
    // Enough digits to see a tenth of a per cent.
    const digits = Math.max(0, 3 - Math.floor(Math.log10(Math.abs(target) || 1)));
    const current = amps => fixed(amps * scale, digits);
    const clip = `clip-${leg.name}`;
    const picture = draw('svg', { viewBox: `0 0 ${width} ${height}`, width, height, tabindex: 0, role: 'img',
      'aria-label': `Output current of ${leg.name} against its voltage; arrow keys read the curve` });
    picture.append(draw('clipPath', { id: clip }, draw('rect', { x: px(left), y: top, width: px(right - left), height: bottom - top })));
    picture.append(draw('rect', { class: 'range', x: px(x(leg.range[0])), y: top, width: px(x(leg.range[1]) - x(leg.range[0])), height: bottom - top }));
    const across = ticks(0, vMost, Math.max(2, Math.floor((right - left) / 56)));
    for (const [at, text] of across.list) {
      picture.append(line('grid', `M${px(x(at))} ${top}V${bottom}`), word(x(at), bottom + 13, text, { 'text-anchor': x(at) > right - 8 ? 'end' : 'middle' }));
    }
    for (const [at, text] of vertical.list) {
      picture.append(line('grid', `M${px(left)} ${px(y(at))}H${px(right)}`), word(left - 5, y(at) + 4, text, { 'text-anchor': 'end' }));
    }
    const plot = draw('g', { 'clip-path': `url(#${clip})` });
    const path = values => values.map((value, index) => `${index ? 'L' : 'M'}${px(x(leg.volts[index]))} ${px(y(value * scale))}`).join('');
    const indices = leg.volts.map((_, index) => index);
    const back = [...indices].reverse().map(index => `L${px(x(leg.volts[index]))} ${px(y(leg.least[index] * scale))}`).join('');
    plot.append(draw('path', { class: 'band', d: `${path(leg.most)}${back}Z` }));
    if (limit) {
      const label = `±${fixed(limit * 100, limit < 0.0995 ? 1 : 0)}\u00a0%`;
      plot.append(line('limit', `M${px(left)} ${px(y(target * (1 + limit)))}H${px(right)}M${px(left)} ${px(y(target * (1 - limit)))}H${px(right)}`));
      if (zoom === 'near') picture.append(word(right - 3, y(target * (1 - limit)) + 12, label, { class: 'limit-name', 'text-anchor': 'end' }));
    }
    plot.append(draw('path', { class: 'nominal', d: path(leg.nominal) }));
    picture.append(plot, line('axis', `M${px(left)} ${top}V${bottom}H${px(right)}`));
    if (leg.headroom !== null && leg.headroom <= vMost) {
      const at = x(leg.headroom);
      picture.append(line('headroom', `M${px(at)} ${bottom}V${top + 4}`),
        draw('path', { class: 'strong', style: 'fill:var(--ink)', d: `M${px(at - 4)} ${bottom + 1}h8l-4 -7z` }));
    }
    picture.append(word(2, 11, `current, ${unit}`), word(right, height - 4, leg.source ? 'volts below supply' : 'volts above ground', { 'text-anchor': 'end' }));
    // Reading the curve.
    const cross = line('cross', '');
    picture.append(cross);
    const shown = word(right, 11, '', { class: 'strong', 'text-anchor': 'end' });
    picture.append(shown);
    let at = -1;
    const read = index => {
      at = Math.max(0, Math.min(leg.volts.length - 1, index));
      cross.setAttribute('d', `M${px(x(leg.volts[at]))} ${top}V${bottom}`);
      shown.textContent = `${fixed(leg.volts[at], 3)}\u00a0V: ${current(leg.nominal[at])} (${current(leg.least[at])} to ${current(leg.most[at])})`;
      reading.textContent = `${shown.textContent} ${unit}`;
    };
    const stop = () => { cross.setAttribute('d', ''); shown.textContent = ''; reading.textContent = ''; };
    picture.addEventListener('pointermove', event => {
      const box = picture.getBoundingClientRect();
      const volts = ((event.clientX - box.left) * width / box.width - left) / (right - left) * vMost;
      let near = 0;
      leg.volts.forEach((v, index) => { if (Math.abs(v - volts) < Math.abs(leg.volts[near] - volts)) near = index; });
      read(near);
    });
    picture.addEventListener('pointerleave', stop);
    picture.addEventListener('blur', stop);
    picture.addEventListener('keydown', event => {
      const way = { ArrowRight: 1, ArrowLeft: -1 }[event.key];
      if (way) { event.preventDefault(); read(at < 0 ? inRange[0] || 0 : at + way); }
    });
    return picture;
  }

  function drawBudget(leg, width) {
    const ROW = 17, top = 18;
    const systematic = leg.budget.filter(part => !part.random), random = leg.budget.filter(part => part.random);
    const shift = systematic.reduce((sum, part) => sum + part.value, 0);
    const rows = [...systematic, ...random];
    const height = Math.max(198, top + ROW * (rows.length + 1) + 14);
    const texts = ['worst error', ...rows.map(part => part.label)];
    const left = Math.ceil(Math.max(...texts.map(text => measure(text, 11, 600)))) + 10;
    const valueWidth = Math.ceil(Math.max(...[leg.error_text, ...rows.map(part => part.text)].map(text => measure(text, 11, 600)))) + 8;
    const right = width - valueWidth;
    const least = Math.min(0, ...rows.map(part => part.value));
    const most = 1.04 * Math.max(leg.error, leg.error_limit || 0, ...rows.map(part => part.value), 1e-6);
    const x = value => left + (value - least) / (most - least) * (right - left);
    const hatch = `hatch-${leg.name}`;
    const picture = draw('svg', { viewBox: `0 0 ${width} ${height}`, width, height, role: 'img',
      'aria-label': `Error budget of ${leg.name}: ${rows.map(part => `${part.label} ${part.text}`).join(', ')}; worst error ${leg.error_text}` });
    picture.append(draw('pattern', { id: hatch, width: 5, height: 5, patternUnits: 'userSpaceOnUse', patternTransform: 'rotate(45)' }, draw('path', { class: 'hatch-line', d: 'M0 0V5' })));
    const bar = (from, to, y, isRandom) => {
      const [a, b] = from < to ? [from, to] : [to, from];
      return draw('rect', { class: isRandom ? 'hatched' : 'solid', fill: isRandom ? `url(#${hatch})` : null, x: px(x(a)), y: y + 3, width: Math.max(0.8, px(x(b) - x(a))), height: ROW - 7 });
    };
    const total = Math.min(Math.abs(shift), leg.error);
    picture.append(word(0, top + 12, 'worst error', { class: 'strong', style: 'font-weight:600' }), word(width - 1, top + 12, leg.error_text, { class: 'strong', style: 'font-weight:600', 'text-anchor': 'end' }),
      bar(0, total, top, false), bar(total, leg.error, top, true));
    rows.forEach((part, index) => {
      const y = top + 6 + ROW * (index + 1);
      picture.append(word(0, y + 12, part.label), word(width - 1, y + 12, part.text, { 'text-anchor': 'end' }), bar(0, part.value, y, part.random));
    });
    const end = top + 8 + ROW * (rows.length + 1);
    picture.append(line('axis', `M${px(x(0))} ${top}V${end}`));
    if (leg.error_limit) {
      const at = x(leg.error_limit);
      picture.append(line('limit', `M${px(at)} ${top - 2}V${end}`), word(Math.min(at, width - 14), 11, 'limit', { class: 'limit-name', 'text-anchor': 'middle' }));
    }
    return picture;
  }

  function drawLegs(network) {
    const place = byId('legs');
    place.replaceChildren(...network.legs.map(leg => {
      const reading = el('span', { class: 'reading', role: 'status' });
      const drawings = el('div', { class: 'drawings' });
      const card = el('article', { class: leg.source ? 'leg source' : 'leg', id: `leg-${leg.name}` },
        el('div', { class: 'head' }, el('h3', null, `${leg.name}  ${leg.head}`), el('span', null, leg.served), reading),
        drawings,
        el('div', { class: 'facts' }, ...leg.facts.map(([name, text, against, corner], index) => el('div', { class: leg.breaks[index] ? 'bad' : null }, el('span', null, name), el('b', null, text), el('span', null, `${against}; `), el('i', null, corner)))));
      card.fillIn = () => {
        const style = getComputedStyle(drawings);
        const columns = style.gridTemplateColumns.split(' ').length;
        const width = Math.max(180, Math.floor((drawings.clientWidth - (columns - 1) * 12) / columns));
        drawings.replaceChildren(drawCurve(leg, width, reading), drawBudget(leg, width));
      };
      return card;
    }));
    for (const card of place.children) card.fillIn();
  }

  // ---- tables ---------------------------------------------------------------------------

  function fillTable(id, table) {
    const row = (cells, tag) => el('tr', null, ...cells.map((cell, index) => el(tag, { class: table.right[index] ? 'n' : null, scope: tag === 'th' ? 'col' : null }, cell)));
    byId(id).replaceChildren(el('thead', null, row(table.head, 'th')), el('tbody', null, ...table.rows.map(cells => row(cells, 'td'))));
    if (table.sum) byId(id).append(el('tfoot', null, row(table.sum, 'td')));
  }

  // ---- choosing -------------------------------------------------------------------------

  function show() {
    const network = data.networks[chosen];
    byId('network-title').textContent = network.title[0].toUpperCase() + network.title.slice(1);
    byId('previous').disabled = chosen === 0;
    byId('next').disabled = chosen === data.networks.length - 1;
    byId('files').replaceChildren(...network.files.map(([path, text]) => el('li', null, el('a', { href: path }, text))));
    const broken = byId('network-broken');
    broken.replaceChildren(...network.broken.map(text => el('li', null, text)));
    broken.hidden = !network.broken.length || byId('broken') !== null;
    fillTable('families', network.families);
    fillTable('figures', network.figures);
    fillTable('output-table', network.outputs);
    fillTable('budget-table', network.budgets);
    fillTable('device-table', network.devices);
    drawTree(network);
    drawLegs(network);
    markChosen();
  }

  // Brings the chosen row into its list without moving the page.
  function reveal() {
    const row = document.querySelector('#ranked tr.chosen'), list = row && row.closest('.list');
    if (!list) return;
    const above = row.offsetTop - list.querySelector('thead').offsetHeight, below = row.offsetTop + row.offsetHeight - list.clientHeight;
    if (list.scrollTop > above) list.scrollTop = above;
    if (list.scrollTop < below) list.scrollTop = below;
  }

  function choose(index) {
    if (index === chosen || index < 0 || index >= data.networks.length) return;
    chosen = index;
    show();
    reveal();
    history.replaceState(null, '', `#${data.networks[index].stem}`);
  }

  // ---- start ----------------------------------------------------------------------------

  document.querySelectorAll('#ranked tbody tr').forEach((row, index) => {
    row.dataset.index = index;
    const cell = row.cells[0];
    const button = el('button', { type: 'button', 'aria-label': data.networks[index].title }, cell.textContent);
    cell.replaceChildren(button);
    row.addEventListener('click', () => choose(index));
    row.addEventListener('pointerenter', () => mark('near', index, true));
    row.addEventListener('pointerleave', () => mark('near', index, false));
  });
  byId('previous').addEventListener('click', () => choose(chosen - 1));
  byId('next').addEventListener('click', () => choose(chosen + 1));
  document.querySelector('.bar .steps').hidden = data.networks.length < 2;
  document.querySelector('.legend').hidden = false;
  for (const input of document.querySelectorAll('input[name=zoom]')) {
    input.addEventListener('change', () => { zoom = input.value; drawLegs(data.networks[chosen]); });
  }
  const selects = [byId('axis-x'), byId('axis-y')];
  selects.forEach((select, axis) => {
    select.value = data.figures[axes[axis]].name;
    select.addEventListener('change', () => {
      axes[axis] = data.figures.findIndex(figure => figure.name === select.value);
      drawFront();
    });
  });
  byId('axes').hidden = data.networks.length < 2;
  const named = () => data.networks.findIndex(network => `#${network.stem}` === location.hash);
  addEventListener('hashchange', () => { if (named() >= 0) choose(named()); });
  chosen = Math.max(0, named());
  drawFront();
  show();
  reveal();
  let width = document.documentElement.clientWidth, waiting = 0;
  const redraw = () => { drawFront(); drawTree(data.networks[chosen]); for (const card of byId('legs').children) card.fillIn(); };
  addEventListener('resize', () => {
    if (document.documentElement.clientWidth === width) return;
    width = document.documentElement.clientWidth;
    cancelAnimationFrame(waiting);
    waiting = requestAnimationFrame(redraw);
  });
})();
