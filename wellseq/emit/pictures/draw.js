// The picture of one instant: potential, clouds, depths, volts.
const SVG = 'http://www.w3.org/2000/svg';

function make(name, attributes, text) {
  const found = document.createElementNS(SVG, name);
  for (const [key, value] of Object.entries(attributes)) found.setAttribute(key, value);
  if (text !== undefined) found.textContent = text;
  return found;
}

function percent(share) {
  return (share * 100).toFixed(3) + '%';
}

function asinhScale(low, high, soft) {
  const ends = [Math.asinh(low / soft), Math.asinh(high / soft)];
  return (volts) => 1 - (Math.asinh(volts / soft) - ends[0]) / (ends[1] - ends[0]);
}

function straightScale(low, high) {
  return (volts) => 1 - (volts - low) / (high - low);
}

const holder = document.querySelector('#scene-holder .scene');
const names = document.querySelector('.stage .names');
const still = holder ? [...holder.querySelectorAll('.grid,.tick')].map((one) => one.cloneNode(true)) : [];

function path(curve, y, from, to) {
  const pieces = [];
  const last = curve.length - 1;
  for (let at = 0; at <= last; at += 1) {
    const x = (at / last - from) / (to - from);
    if (x < -0.1 || x > 1.1) continue;
    const high = Math.min(3, Math.max(-2, y(curve[at])));
    pieces.push(Math.round(x * 10000) + ',' + (high * 1000).toFixed(1));
  }
  return 'M' + pieces.join('L');
}

function disc(cloud, x, y, group) {
  group.append(make('circle', {cx: x, cy: y, r: 8}));
  group.append(make('text', {x, y, dy: 4.5, class: 'charge'}, cloud.charges > 0 ? '+' : '\u2212'));
  group.append(make('text', {x, y, dx: 12, dy: 4, class: 'who'}, cloud.name));
}

function arrow(side, word, bottom, curve, x, y) {
  const group = make('g', {});
  const share = Math.min(1, Math.max(0, shareOf(side[3])));
  const across = x(share);
  const outside = word === 'left' ? share > 0.07 : share > 0.93;
  const level = valueAt(curve, side[3]);
  const ends = [percent(y(bottom)), percent(y(level))];
  group.append(make('line', {x1: across, x2: across, y1: ends[0], y2: ends[1], class: 'depth'}));
  group.append(make('circle', {cx: across, cy: ends[1], r: 3, class: 'tip'}));
  const middle = percent((y(bottom) + y(level)) / 2);
  group.append(make('text', {x: across, y: middle, dx: outside ? -5 : 5, class: 'deep ' + (outside ? 'left' : 'right')},
    '\u2265 ' + amount(side[0], 'V')));
  return group;
}

function drawCloud(number, now, curve, x, y, flip) {
  const cloud = facts.clouds[number];
  const stay = stayAt(cloud, now.block, now.time);
  if (!stay) return '';
  const group = make('g', {class: 'cloud cloud-' + (number % 6 + 1)});
  if (stay[5]) {
    const energy = standing(cloud, now.block, now.time).get('energy');
    const level = energy ? (flip ? 1 : Math.sign(cloud.charges)) * energy[7] / Math.abs(cloud.charges) : 0;
    const high = percent(y(level));
    group.append(make('line', {x1: x(shareOf(stay[3])), x2: x(shareOf(stay[4])), y1: high, y2: high, class: 'energy'}));
    disc(cloud, x(shareOf((stay[3] + stay[4]) / 2)), high, group);
    return group;
  }
  const raw = flip ? curve.map((volt) => volt * Math.sign(cloud.charges)) : curve;
  const z = siteOf(cloud, stay, now.time, raw);
  const bottom = valueAt(curve, z);
  const own = percent(y(bottom));
  group.append(make('line', {x1: x(Math.max(0, shareOf(stay[6][3]))), x2: x(Math.min(1, shareOf(stay[7][3]))), y1: own, y2: own, class: 'level'}));
  group.append(arrow(stay[6], 'left', bottom, curve, x, y));
  group.append(arrow(stay[7], 'right', bottom, curve, x, y));
  const row = toldOf(number, now);
  if (row && row[4][3]) {
    const half = row[4][3][0] / 2;
    group.append(make('line', {x1: x(shareOf(z - half)), x2: x(shareOf(z + half)), y1: own, y2: own, class: 'extent'}));
  }
  holder.append(group);
  const over = make('g', {class: group.getAttribute('class')});
  disc(cloud, x(shareOf(z)), own, over);
  return over;
}

function drawWhole(now, curve) {
  for (const one of names.querySelectorAll('.window')) one.remove();
  const y = asinhScale(facts.scale[0], facts.scale[1], facts.scale[2]);
  holder.replaceChildren(...holder.querySelectorAll(':scope>title,:scope>desc'), ...still);
  const plot = make('svg', {viewBox: '0 0 10000 1000', preserveAspectRatio: 'none', class: 'plot'});
  plot.append(make('path', {d: path(curve, y, 0, 1), class: 'phi'}));
  holder.append(plot);
  holder.append(...facts.clouds.map((_, number) => drawCloud(number, now, curve, percent, y, false)));
}

// The electrodes under a close view, and where that view is in the whole stack.
function drawFloor(x, from, to) {
  for (const [name, , left, right] of facts.electrodes) {
    if (right < from || left > to) continue;
    const [low, high] = [Math.max(left, from), Math.min(right, to)];
    const width = (parseFloat(x(high)) - parseFloat(x(low))).toFixed(3) + '%';
    holder.append(make('rect', {x: x(low), width, y: '96%', height: '4%', class: 'wall'}));
    holder.append(make('text', {x: x((low + high) / 2), y: '95%', class: 'tick', 'text-anchor': 'middle'}, name));
  }
  const width = percent(Math.min(1, to) - Math.max(0, from));
  names.append(make('rect', {x: percent(Math.max(0, from)), width, y: 0, height: 28, class: 'window'}));
}

// Close to one cloud: its energy per charge, straight, so that its well looks like one.
function drawClose(number, now, curve) {
  const cloud = facts.clouds[number];
  const stay = stayAt(cloud, now.block, now.time);
  if (!stay || stay[5]) return drawWhole(now, curve);
  for (const one of names.querySelectorAll('.window')) one.remove();
  const sign = Math.sign(cloud.charges);
  const level = curve.map((volt) => volt * sign);
  const z = siteOf(cloud, stay, now.time, curve);
  const bottom = valueAt(level, z);
  const barriers = [stay[6], stay[7]].map((side) => valueAt(level, side[3]));
  const top = Math.min(...barriers) - bottom;
  const room = Math.max(top, 0.02);
  const reach = Math.max(stay[7][3] - z, z - stay[6][3], 0.005) * 1.35;
  const from = shareOf(z - reach), to = shareOf(z + reach);
  const x = (share) => percent((share - from) / (to - from));
  const y = straightScale(bottom - 0.35 * room, bottom + 1.6 * room);
  holder.replaceChildren(...holder.querySelectorAll(':scope>title,:scope>desc'));
  for (const part of [0, 0.5, 1, 1.5]) {
    const high = percent(y(bottom + part * room));
    holder.append(make('line', {x1: '0%', x2: '100%', y1: high, y2: high, class: 'grid'}));
    holder.append(make('text', {x: 4, y: high, dy: -2, class: 'tick'}, amount(bottom + part * room, 'V')));
  }
  holder.append(make('text', {x: '50%', y: 12, class: 'tick', 'text-anchor': 'middle'},
    'energy per charge of ' + cloud.name + ', ' + amount(2 * reach, 'm') + ' across'));
  const plot = make('svg', {viewBox: '0 0 10000 1000', preserveAspectRatio: 'none', class: 'plot'});
  plot.append(make('path', {d: path(level, y, from, to), class: 'phi'}));
  holder.append(plot);
  drawFloor(x, from, to);
  const row = toldOf(number, now);
  const stated = standing(cloud, now.block, now.time).get('temperature');
  const warm = row && row[4][1] ? row[4][1][0] * 8.617333262e-5 : stated ? stated[7] : null;
  if (warm !== null) {
    const high = percent(y(bottom + warm / Math.abs(cloud.charges)));
    holder.append(make('line', {x1: x(shareOf(z - reach / 2)), x2: x(shareOf(z + reach / 2)), y1: high, y2: high, class: 'grid'}));
    holder.append(make('text', {x: x(shareOf(z + reach / 2)), y: high, class: 'tick'}, 'kT = ' + amount(warm, 'eV')));
  }
  holder.append(drawCloud(number, now, level, x, y, true));
}

function drawVolts(volts) {
  for (const text of document.querySelectorAll('.stage .volts text')) {
    const volt = volts[Number(text.dataset.e)];
    text.textContent = shortVolts(volt);
    text.setAttribute('class', volt > 0 ? 'plus' : volt < 0 ? 'minus' : 'zero');
  }
}

function saysOf(number, now, curve) {
  const cloud = facts.clouds[number];
  const stay = stayAt(cloud, now.block, now.time);
  const lines = [];
  if (!stay) {
    lines.push('not in a proved well now');
  } else if (stay[5]) {
    lines.push('between gates, ' + amount(stay[3], 'm') + ' to ' + amount(stay[4], 'm'));
  } else {
    lines.push('at ' + amount(siteOf(cloud, stay, now.time, curve), 'm'));
  }
  if (stay) {
    lines.push('left \u2265 ' + amount(stay[6][0], 'V') + ', right \u2265 ' + amount(stay[7][0], 'V'));
    lines.push('limit ' + amount(Math.min(stay[6][2], stay[7][2]), 'V') + (stay[5] ? ', from ground' : ''));
    const row = toldOf(number, now);
    if (row) lines.push('forecast at the end of ' + clock(row[1], row[3]) + ':', ...foretold(row));
    for (const one of standing(cloud, now.block, now.time).values()) {
      if (row && one[6] === 'declared') continue;
      const per = one[2] === 'temperature' && one[7] !== null ? ' (' + amount(one[7], 'eV') + ')' : '';
      const wide = one[4] ? ' \u00b1 ' + amount(one[4], one[5]) : '';
      lines.push(one[2] + ' ' + amount(one[3], one[5]) + wide + per + ', ' + one[6]);
    }
  }
  return lines.join('\n');
}

// The forecast row of a cloud at the end of the step that goes on now, else the last one.
function toldOf(number, now) {
  let found = null;
  for (const row of facts.told) {
    if (row[0] !== number) continue;
    if (row[1] > now.block || (row[1] === now.block && row[2] > now.time)) break;
    found = row;
  }
  return found;
}

function foretold(row) {
  return facts.quantities.map(([words, unit], at) => {
    const figure = row[4][at];
    return words + ' ' + (figure === null ? 'not known' : amount(figure[0], unit) +
      (figure[1] === figure[2] ? '' : ' (' + amount(figure[1], unit) + ' to ' + amount(figure[2], unit) + ')'));
  });
}
