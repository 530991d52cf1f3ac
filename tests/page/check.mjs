// Looks at the page of a results folder with a headless browser: chooses every network by its
// point and by its row, with pointer and with keys, in both colour schemes and at two widths, and
// fails on any console error, exception, request that leaves the folder, overflow of the page, or
// choice that changes nothing.
//
//   node tests/page/check.mjs RESULTS_FOLDER [BROWSER]
//
// Speaks the DevTools protocol over a pipe; needs Node 18 and a Chromium, nothing else.

import { spawn } from 'node:child_process';
import { existsSync, mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join, resolve } from 'node:path';
import { pathToFileURL } from 'node:url';

const [folder, browser = ['/usr/bin/chromium', '/usr/bin/chromium-browser', '/usr/bin/google-chrome'].find(existsSync)] = process.argv.slice(2);
if (!folder || !existsSync(join(folder, 'report.html'))) {
  console.error('usage: node tests/page/check.mjs RESULTS_FOLDER [BROWSER]   (the folder holds report.html)');
  process.exit(2);
}
if (!browser) {
  console.error('no browser found; name one as the second argument');
  process.exit(2);
}
const page = pathToFileURL(resolve(folder, 'report.html')).href;
const profile = mkdtempSync(join(tmpdir(), 'page-check-'));
const child = spawn(browser, ['--headless', '--no-sandbox', '--disable-gpu', '--disable-quic', '--no-first-run',
  '--disable-background-networking', '--disable-component-update', '--disable-sync', '--remote-debugging-pipe',
  `--user-data-dir=${profile}`, 'about:blank'], { stdio: ['ignore', 'ignore', 'ignore', 'pipe', 'pipe'] });

// ---- the protocol -------------------------------------------------------------------------

let number = 0, rest = Buffer.alloc(0);
const waiting = new Map(), listeners = [], faults = [];
child.stdio[4].on('data', chunk => {
  rest = Buffer.concat([rest, chunk]);
  for (let end = rest.indexOf(0); end >= 0; end = rest.indexOf(0)) {
    const message = JSON.parse(rest.subarray(0, end).toString());
    rest = rest.subarray(end + 1);
    if (message.id) {
      const { done, failed, method } = waiting.get(message.id);
      waiting.delete(message.id);
      if (message.error) failed(new Error(`${method}: ${message.error.message}`));
      else done(message.result);
    } else {
      for (const listener of listeners) listener(message);
    }
  }
});
const send = (method, params = {}, sessionId) => new Promise((done, failed) => {
  waiting.set(++number, { done, failed, method });
  child.stdio[3].write(`${JSON.stringify({ id: number, method, params, sessionId })}\0`);
});
const ended = new Promise(done => child.on('exit', done));
const close = async () => {
  const late = setTimeout(() => child.kill('SIGKILL'), 5000);
  await Promise.race([send('Browser.close'), ended]);
  await ended;
  clearTimeout(late);
  rmSync(profile, { recursive: true, force: true, maxRetries: 5, retryDelay: 200 });
};
const giveUp = setTimeout(() => {
  console.error('the browser did not answer within two minutes');
  child.kill('SIGKILL');
  process.exit(1);
}, 120000);

// ---- one visit ----------------------------------------------------------------------------

async function visit(width, height, scheme, script) {
  const where = `${width} px, ${scheme}${script ? '' : ', no script'}`;
  const fault = text => faults.push(`${where}: ${text}`);
  const { targetId } = await send('Target.createTarget', { url: 'about:blank' });
  const { sessionId } = await send('Target.attachToTarget', { targetId, flatten: true });
  const on = (method, params) => send(method, params, sessionId);
  const loaded = new Promise(done => {
    listeners.push(({ method, params, sessionId: from }) => {
      if (from !== sessionId) return;
      if (method === 'Page.loadEventFired') done();
      if (method === 'Runtime.exceptionThrown') fault(`exception: ${params.exceptionDetails.exception?.description || params.exceptionDetails.text}`);
      if (method === 'Runtime.consoleAPICalled' && ['error', 'warning', 'assert'].includes(params.type)) fault(`console: ${params.args.map(arg => arg.value).join(' ')}`);
      if (method === 'Log.entryAdded' && ['error', 'warning'].includes(params.entry.level)) fault(`log: ${params.entry.text}`);
      if (method === 'Network.requestWillBeSent' && params.request.url !== page && !params.request.url.startsWith('data:')) fault(`request: ${params.request.url}`);
    });
  });
  for (const domain of ['Page', 'Runtime', 'Log', 'Network']) await on(`${domain}.enable`);
  await on('Emulation.setDeviceMetricsOverride', { width, height, deviceScaleFactor: 1, mobile: false });
  await on('Emulation.setEmulatedMedia', { features: [{ name: 'prefers-color-scheme', value: scheme }, { name: 'prefers-reduced-motion', value: 'reduce' }] });
  if (!script) await on('Emulation.setScriptExecutionDisabled', { value: true });
  await on('Page.navigate', { url: page });
  await loaded;

  if (!script) {
    const { root } = await on('DOM.getDocument', { depth: 0 });
    const html = (await on('DOM.getOuterHTML', { nodeId: root.nodeId })).outerHTML;
    const block = html.match(/<script id="data"[^>]*>(.*?)<\/script>/s);
    if (block) {
      const first = JSON.parse(block[1]).networks[0];
      for (const [id, table] of [['device-table', first.devices], ['output-table', first.outputs], ['figures', first.figures]]) {
        const rows = html.slice(html.indexOf(`id="${id}"`)).split('</table>')[0].split('<tr').length - 1;
        const expected = 1 + table.rows.length + (table.sum ? 1 : 0);
        if (rows !== expected) fault(`${id} has ${rows} rows in the page, not ${expected}`);
      }
    }
    await send('Target.closeTarget', { targetId });
    return 0;
  }

  const run = async expression => {
    const { result, exceptionDetails } = await on('Runtime.evaluate', { expression, returnByValue: true, awaitPromise: true });
    if (exceptionDetails) throw new Error(`${expression}: ${exceptionDetails.exception?.description}`);
    return result.value;
  };
  const centre = async selector => {
    const at = await run(`(() => { const e = document.querySelector(${JSON.stringify(selector)}); if (!e) return null;
      e.scrollIntoView({ block: 'center', inline: 'nearest' }); const b = e.getBoundingClientRect();
      const x = b.left + b.width / 2, y = b.top + b.height / 2, hit = document.elementFromPoint(x, y);
      return { x, y, hit: hit !== null && (e.contains(hit) || hit.closest('[data-index]') !== null) }; })()`);
    if (!at) fault(`${selector} is not there`);
    else if (!at.hit) fault(`${selector} cannot be reached with a pointer`);
    return at;
  };
  const click = async selector => {
    const at = await centre(selector);
    if (!at) return;
    for (const type of ['mouseMoved', 'mousePressed', 'mouseReleased']) await on('Input.dispatchMouseEvent', { type, x: at.x, y: at.y, button: type === 'mouseMoved' ? 'none' : 'left', clickCount: 1 });
  };
  const key = async name => {
    for (const type of ['keyDown', 'keyUp']) await on('Input.dispatchKeyEvent', { type, key: name, code: name, windowsVirtualKeyCode: { Enter: 13, ArrowRight: 39, ArrowLeft: 37 }[name] });
  };
  const details = () => run(`JSON.stringify([...document.querySelectorAll('#network, #outputs, #devices')].map(e => e.innerHTML))`);
  const title = () => run(`document.getElementById('network-title').textContent`);
  const stems = await run(`document.getElementById('data') ? JSON.parse(document.getElementById('data').textContent).networks.map(n => [n.stem, n.title]) : []`);

  // Every inner and every relative link leads somewhere.
  for (const link of await run(`[...document.querySelectorAll('a')].map(a => a.getAttribute('href'))`)) {
    if (link.startsWith('#') ? !(await run(`document.getElementById(${JSON.stringify(link.slice(1))}) !== null`)) : !existsSync(join(folder, link))) fault(`dead link ${link}`);
  }
  const wide = await run('document.documentElement.scrollWidth - document.documentElement.clientWidth');
  if (wide > 0) fault(`the page is ${wide} px wider than its window`);
  // No letter of a drawing lies outside of it.
  const clipped = await run(`[...document.querySelectorAll('svg')].flatMap(svg => { const s = svg.getBoundingClientRect();
    return [...svg.querySelectorAll('text')].filter(t => { const b = t.getBoundingClientRect(); return b.left < s.left - 1 || b.right > s.right + 1 || b.top < s.top - 1 || b.bottom > s.bottom + 1; }).map(t => t.textContent); })`);
  if (clipped.length) fault(`clipped labels: ${clipped.join(' | ')}`);

  const choose = async (index, how, action) => {
    const before = await details();
    const was = await title();
    await action();
    const now = await title();
    const expected = stems[index][1];
    if (now.toLowerCase() !== expected.toLowerCase()) fault(`${how} ${expected} shows ${now}`);
    if (was !== now && (await details()) === before) fault(`${how} ${expected} changes no detail`);
    if ((await run(`document.querySelectorAll('#ranked tr.chosen').length`)) !== 1) fault(`${how} ${expected}: not one row is marked`);
  };
  // Where points cover each other the pointer reaches the topmost one: a covered point is left to
  // its row and to the keys.
  for (let index = 0; index < stems.length; index += 1) {
    const point = `.point[data-index="${index}"]`;
    const free = await run(`(() => { const e = document.querySelector('${point}'); if (!e) return false; e.scrollIntoView({ block: 'center' });
      const b = e.querySelector('.dot').getBoundingClientRect(); const hit = document.elementFromPoint(b.left + b.width / 2, b.top + b.height / 2);
      return hit !== null && hit.closest('.point') === e; })()`);
    if (free) await choose(index, 'point of', () => click(`${point} .dot`));
    if (free && (await run(`document.getElementById('hint').hidden`))) fault(`no hint for ${stems[index][1]}`);
  }
  for (let index = stems.length - 1; index >= 0; index -= 1) {
    await choose(index, 'row of', () => click(`#ranked tr[data-index="${index}"] td:nth-child(2)`));
  }
  for (let index = 0; index < stems.length; index += 1) {
    if (!(await run(`document.querySelector('.point[data-index="${index}"]') !== null`))) continue;
    await choose(index, 'Enter on', async () => { await run(`document.querySelector('.point[data-index="${index}"]').focus()`); await key('Enter'); });
  }
  if (stems.length > 1) {
    await choose(stems.length - 2, 'button to', () => click('#previous'));
    await choose(stems.length - 1, 'button to', () => click('#next'));
  }
  if (stems.length) {
    const near = await run(`document.getElementById('legs').innerHTML`);
    await click('input[value=zero]');
    if ((await run(`document.getElementById('legs').innerHTML`)) === near) fault('the current axis does not change');
    await run(`document.querySelector('#legs svg[tabindex]').focus()`);
    await key('ArrowRight');
    if (!(await run(`document.querySelector('#legs .reading').textContent.includes('V:')`))) fault('arrow keys do not read a curve');
    for (const axis of ['axis-x', 'axis-y']) {
      await run(`(() => { const s = document.getElementById('${axis}'); for (const o of s.options) { s.value = o.value; s.dispatchEvent(new Event('change')); } })()`);
    }
    await on('Emulation.setDeviceMetricsOverride', { width: width === 400 ? 1000 : 600, height, deviceScaleFactor: 1, mobile: false });
    await run('new Promise(done => setTimeout(done, 100))');
  }
  await send('Target.closeTarget', { targetId });
  return stems.length;
}

let shown = 0;
try {
  for (const [width, height] of [[1280, 1600], [400, 1600]]) {
    for (const scheme of ['light', 'dark']) shown = await visit(width, height, scheme, true);
  }
  await visit(1280, 1600, 'light', false);
} catch (error) {
  faults.push(error.stack);
}
clearTimeout(giveUp);
await close();
if (faults.length) {
  console.error(faults.join('\n'));
  process.exit(1);
}
const size = Math.round(readFileSync(join(folder, 'report.html')).length / 1024);
console.log(`${join(folder, 'report.html')}: ${shown} networks, ${size} KiB, no fault`);
