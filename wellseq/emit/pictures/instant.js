// The facts of the page, and what they come to at one instant.
const facts = JSON.parse(document.getElementById('facts').textContent);
const WHOLE = 100000;
const cells = facts.cells || [];
const tops = cells.map((one) => one[3]);

function cellAt(place) {
  let low = 0, high = tops.length - 1;
  while (low < high) {
    const middle = (low + high + 1) >> 1;
    if (tops[middle] <= place) low = middle; else high = middle - 1;
  }
  return low;
}

function bottomOf(index) {
  return index + 1 < tops.length ? tops[index + 1] : WHOLE;
}

function instantAt(place) {
  const index = cellAt(place);
  const [block, start, end, top] = cells[index];
  const high = bottomOf(index) - top;
  const share = high > 0 ? Math.min(1, Math.max(0, (place - top) / high)) : 0;
  return {index, block, time: start + (end - start) * share, place};
}

function placeOf(block, time) {
  let best = 0;
  for (let index = 0; index < cells.length; index += 1) {
    const [other, start, end, top, wait] = cells[index];
    if (other !== block || wait) continue;
    if (time >= start && time <= end) {
      best = top + (bottomOf(index) - top) * (end > start ? (time - start) / (end - start) : 0.5);
      if (end > start) return best;
    }
  }
  return best;
}

function courseAt(course, block, time) {
  const [times, volts, smooth] = course[block];
  let low = 0, high = times.length - 1;
  if (time <= times[0] && times[1] !== times[0]) return volts[0];
  if (time >= times[high]) return volts[high];
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if (times[middle] <= time) low = middle; else high = middle;
  }
  const span = times[high] - times[low];
  let share = span > 0 ? (time - times[low]) / span : 1;
  if (smooth.includes(high)) share = 0.5 * (1 - Math.cos(Math.PI * share));
  return volts[low] + (volts[high] - volts[low]) * share;
}

function voltsAt(block, time) {
  const known = facts.courses.map((course) => courseAt(course, block, time));
  return facts.electrodes.map((one) => known[one[1]]);
}

function potential(volts) {
  const {units, count, per} = facts.stage;
  const found = new Float64Array(count);
  volts.forEach((volt, number) => {
    if (!volt) return;
    const unit = units[number];
    for (let at = 0; at < count; at += 1) found[at] += volt * per * unit[at];
  });
  return found;
}

function shareOf(z) {
  return (z - facts.stage.low) / (facts.stage.high - facts.stage.low);
}

function valueAt(curve, z) {
  const place = Math.min(curve.length - 1, Math.max(0, shareOf(z) * (curve.length - 1)));
  const low = Math.min(curve.length - 2, Math.floor(place));
  return curve[low] + (curve[low + 1] - curve[low]) * (place - low);
}

function stayAt(cloud, block, time) {
  let found = null;
  for (const stay of cloud.stays) {
    if (stay[0] === block && stay[1] <= time && time <= stay[2]) found = stay;
  }
  return found;
}

function siteOf(cloud, stay, time, curve) {
  // The proved place at this instant, then down to the minimum that belongs to it.
  const span = stay[2] - stay[1];
  const share = span > 0 ? (time - stay[1]) / span : 0;
  const near = stay[3] + (stay[4] - stay[3]) * share;
  const {low, high} = facts.stage;
  const step = (high - low) / (curve.length - 1);
  const sign = Math.sign(cloud.charges);
  const least = Math.min(stay[6][4], near), most = Math.max(stay[7][5], near);
  let at = Math.round((near - low) / step);
  const level = (index) => sign * curve[index];
  const inside = (index) => low + index * step >= least && low + index * step <= most;
  while (at + 1 < curve.length && inside(at + 1) && level(at + 1) < level(at)) at += 1;
  while (at > 0 && inside(at - 1) && level(at - 1) < level(at)) at -= 1;
  return low + at * step;
}

function standing(cloud, block, time) {
  // What was last stated of each quantity before this instant.
  const found = new Map();
  for (const one of cloud.stated) {
    if (one[0] < block || (one[0] === block && one[1] <= time)) found.set(one[2], one);
  }
  if (found.has('temperature')) found.delete('energy');
  return found;
}

function statementsAt(index) {
  return cells[index] ? cells[index][5] : [];
}

function clock(block, time) {
  return facts.blocks[block][0] + ' + ' + amount(time, 's');
}

function partAt(place) {
  let label = '';
  for (const [name, top] of facts.parts) if (top <= place + 0.05) label = name;
  return label;
}
