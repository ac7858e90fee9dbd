// The slider, the score's height and its clock, links to instants.
const byId = (id) => document.getElementById(id);
const root = document.documentElement;
const slider = byId('slider');
let seconds = null;

if (byId('theme')) {
  byId('theme').addEventListener('click', () => {
    const dark = matchMedia('(prefers-color-scheme: dark)').matches;
    const now = root.dataset.theme || (dark ? 'dark' : 'light');
    root.dataset.theme = now === 'dark' ? 'light' : 'dark';
  });
}
function start() {
  byId('controls').hidden = false;
  document.querySelector('.zoom').hidden = false;
  slider.addEventListener('input', () => show(Number(slider.value)));
  slider.addEventListener('keydown', keys);
  byId('back').addEventListener('click', () => step(-1));
  byId('on').addEventListener('click', () => step(1));
  byId('play').addEventListener('click', play);
  byId('look').addEventListener('change', () => show(Number(slider.value)));
  byId('zoom').addEventListener('input', zoom);
  for (const one of document.querySelectorAll('input[name=by]')) one.addEventListener('change', clocks);
  for (const one of document.querySelectorAll('svg.time')) one.addEventListener('click', pick);
  document.addEventListener('click', jump);
  for (const one of document.querySelectorAll('.text li')) one.addEventListener('click', fromLine);
  fit();
  addEventListener('resize', () => { fit(); show(Number(slider.value)); });
  const first = cells.findIndex((one) => one[2] > one[1]);
  show(Math.max(0, first) < cells.length ? cells[Math.max(0, first)][3] : 0);
}

function show(place) {
  const now = instantAt(Math.min(place, WHOLE - 0.5));
  const volts = voltsAt(now.block, now.time);
  const curve = potential(volts);
  const look = byId('look').value;
  if (holder && facts.stage.units.length) {
    if (look === 'all') drawWhole(now, curve); else drawClose(Number(look), now, curve);
  }
  drawVolts(volts);
  for (const one of document.querySelectorAll('dl.now dd')) {
    one.textContent = saysOf(Number(one.dataset.cloud), now, curve);
  }
  slider.value = place;
  const words = spoken(now);
  byId('now').textContent = words;
  slider.setAttribute('aria-valuetext', words);
  markText(now.index);
  const high = shown(place) / WHOLE;
  for (const [one, panel] of cursors) one.style.top = (panel.offset + panel.height * high) + 'px';
  for (const one of document.querySelectorAll('.cursor span')) one.textContent = briefly(now);
}

function spoken(now) {
  const cell = cells[now.index];
  if (cell[4]) return 'waiting for ' + facts.blocks[now.block][0];
  const [number, statement] = cell[5][cell[5].length - 1] || [0, -1];
  const part = partAt(now.place);
  return clock(now.block, now.time) + (part ? ', ' + part : '') +
    (statement >= 0 ? ', step ' + number + ': ' + facts.statements[statement][0] : '');
}

function briefly(now) {
  const last = cells[now.index][5][cells[now.index][5].length - 1];
  return last ? facts.statements[last[1]][0] : 'wait';
}

// Where the panels lie is asked once for each layout, not at every move.
let cursors = [];
function measure() {
  cursors = [...document.querySelectorAll('.cursor')].map((one) => {
    one.style.display = 'block';
    const panel = one.parentElement.querySelector('svg.time').getBoundingClientRect();
    return [one, {offset: panel.top - one.parentElement.getBoundingClientRect().top, height: panel.height}];
  });
}

let marked = [];
function markText(index) {
  for (const one of marked) { one.classList.remove('now', 'called'); one.removeAttribute('aria-current'); }
  marked = [];
  for (const [, statement] of statementsAt(index)) {
    facts.statements[statement][1].forEach(([file, first, last], depth) => {
      for (let line = first; line <= last; line += 1) {
        const one = byId('line-' + file + '-' + line);
        if (!one) continue;
        one.classList.add(depth ? 'called' : 'now');
        if (!depth && line === first) one.setAttribute('aria-current', 'step');
        marked.push(one);
      }
    });
  }
  const first = marked[0];
  const pane = first && first.closest('.text');
  if (pane) {
    const where = first.offsetTop - pane.scrollTop;
    if (where < 20 || where > pane.clientHeight - 40) pane.scrollTop = first.offsetTop - pane.clientHeight / 3;
  }
}

function middle(index) {
  const wait = cells[index][2] <= cells[index][1];
  return wait ? (tops[index] + bottomOf(index)) / 2 : tops[index] + 0.06;
}

function step(by) {
  const index = Math.min(cells.length - 1, Math.max(0, cellAt(Number(slider.value)) + by));
  show(middle(index));
}

function part(by) {
  const place = Number(slider.value);
  const starts = facts.parts.map((one) => one[1]);
  const found = by > 0 ? starts.find((one) => one > place + 1) : starts.filter((one) => one < place - 40).pop();
  show(found === undefined ? (by > 0 ? WHOLE : 0) : middle(cellAt(found + 0.2)));
}

function keys(event) {
  const moves = {
    ArrowRight: () => step(1), ArrowUp: () => step(-1), ArrowLeft: () => step(-1), ArrowDown: () => step(1),
    PageDown: () => part(1), PageUp: () => part(-1), Home: () => show(0), End: () => show(WHOLE),
  };
  if (!moves[event.key] || event.ctrlKey || event.altKey || event.metaKey) return;
  event.preventDefault();
  if (event.shiftKey && event.key.startsWith('Arrow')) {
    const by = event.key === 'ArrowRight' || event.key === 'ArrowDown' ? 50 : -50;
    show(Math.min(WHOLE, Math.max(0, Number(slider.value) + by)));
  } else {
    moves[event.key]();
  }
}

let playing = 0;
function play() {
  const button = byId('play');
  if (playing) { cancelAnimationFrame(playing); playing = 0; button.textContent = '\u25b8 play'; return; }
  button.textContent = '\u25ae\u25ae stop';
  if (Number(slider.value) >= WHOLE - 1) show(0);
  let last = performance.now();
  const go = (time) => {
    const place = Number(slider.value) + (time - last) / 40000 * WHOLE;
    last = time;
    show(Math.min(WHOLE, place));
    if (place < WHOLE) playing = requestAnimationFrame(go); else { playing = 1; play(); }
  };
  playing = requestAnimationFrame(go);
}

function jump(event) {
  const link = event.target.closest('a[data-s]');
  if (!link) return;
  event.preventDefault();
  show(placeOf(Number(link.dataset.block), Number(link.dataset.s)));
  byId('instant').scrollIntoView();
  slider.focus({preventScroll: true});
}

function fromLine(event) {
  if (String(getSelection())) return;
  const [, file, line] = event.currentTarget.id.split('-').map(Number);
  const found = facts.statements.findIndex((one) => one[1].some(([f, a, b]) => f === file && a <= line && line <= b));
  const index = cells.findIndex((one) => one[5].some((step) => step[1] === found));
  if (found >= 0 && index >= 0) show(middle(index));
}

function pick(event) {
  const box = event.currentTarget.getBoundingClientRect();
  show(back((event.clientY - box.top) / box.height * WHOLE));
}

// Height: what is too low for its text stays hidden.
function zoom() {
  root.style.setProperty('--tall', Math.round(base() * 2 ** Number(byId('zoom').value)) + 'px');
  fit();
  show(Number(slider.value));
}

function base() {
  return Math.max(560, Math.min(1100, innerHeight - 120));
}

function fit() {
  const gutter = document.querySelector('svg.time');
  root.style.setProperty('--tall', Math.round(base() * 2 ** Number(byId('zoom').value)) + 'px');
  const tall = gutter.clientHeight;
  for (const one of document.querySelectorAll('svg.time [data-h]')) {
    const least = Number(one.dataset.least || (one.classList.contains('row') ? 10 : 13));
    const top = Number(one.dataset.y);
    const high = shown(Math.min(WHOLE, top + Number(one.dataset.h))) - shown(top);
    one.classList.toggle('tiny', high / WHOLE * tall < least);
  }
  measure();
}

// By seconds: the same drawing with the places of time moved.
function clocks() {
  const by = document.querySelector('input[name=by]:checked').value === 'seconds';
  seconds = by ? evenTimes() : null;
  for (const panel of document.querySelectorAll('svg.time')) moveAll(panel);
  fit();
  show(Number(slider.value));
}

function evenTimes() {
  const total = cells.reduce((sum, one) => sum + (one[2] - one[1]), 0) || 1;
  const waits = cells.filter((one) => one[4]).length;
  const wait = 0.015, room = 1 - wait * waits;
  const places = [0];
  for (const [, start, end, , waiting] of cells) {
    places.push(places[places.length - 1] + WHOLE * (waiting ? wait : (end - start) / total * room));
  }
  return places;
}

function shown(place) {
  if (!seconds) return place;
  const index = cellAt(place);
  const high = bottomOf(index) - tops[index];
  return seconds[index] + (seconds[index + 1] - seconds[index]) * (high > 0 ? (place - tops[index]) / high : 0);
}

function back(high) {
  if (!seconds) return high;
  let index = seconds.findIndex((one, at) => at + 1 < seconds.length && seconds[at + 1] > high);
  if (index < 0) index = cells.length - 1;
  const span = seconds[index + 1] - seconds[index];
  return tops[index] + (bottomOf(index) - tops[index]) * (span > 0 ? (high - seconds[index]) / span : 0);
}

const kept = new WeakMap();
function original(element, name) {
  if (!kept.has(element)) kept.set(element, {});
  const all = kept.get(element);
  if (!(name in all)) all[name] = element.getAttribute(name);
  return all[name];
}

function moveAll(panel) {
  for (const one of panel.querySelectorAll('path')) {
    one.setAttribute('d', original(one, 'd').replace(/(-?[\d.]+),(-?[\d.]+)/g,
      (_, x, y) => x + ',' + shown(Number(y)).toFixed(1)));
  }
  const places = (text) => shown(parseFloat(text) / 100 * WHOLE);
  for (const name of ['cy', 'y1', 'y2', 'y']) {
    for (const one of panel.querySelectorAll('[' + name + '$="%"]')) {
      const old = original(one, name);
      const top = places(old);
      if (one.hasAttribute('height') && original(one, 'height').endsWith('%')) {
        const bottom = places(parseFloat(old) + parseFloat(original(one, 'height')) + '%');
        one.setAttribute('height', (bottom - top) / WHOLE * 100 + '%');
      }
      one.setAttribute(name, top / WHOLE * 100 + '%');
    }
  }
}

if (slider && cells.length) start();
