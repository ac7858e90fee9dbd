// Numbers as the rest of wellseq writes them: four figures and a prefix.
const PREFIXES = [[1e9, 'G'], [1e6, 'M'], [1e3, 'k'], [1, ''], [1e-3, 'm'], [1e-6, 'u'], [1e-9, 'n']];

function plain(value, digits) {
  // as Python's %g
  if (value === 0) return '0';
  const power = Math.floor(Math.log10(Math.abs(Number(value.toPrecision(digits)))));
  if (power < -4 || power >= digits) {
    const [front, back] = value.toExponential(digits - 1).split('e');
    const size = back.slice(1).padStart(2, '0');
    return front.replace(/\.?0+$/, '') + 'e' + back[0] + size;
  }
  const text = value.toFixed(Math.max(0, digits - 1 - power));
  return text.includes('.') ? text.replace(/\.?0+$/, '') : text;
}

function figures(value) {
  const text = plain(value, 4);
  const size = Math.abs(value);
  return text.includes('e') && size >= 1 && size < 1e9 ? value.toFixed(0) : text;
}

function amount(value, unit) {
  if (value === null || value === undefined || Number.isNaN(value)) return 'not known';
  if (!['V', 's', 'm', 'Hz', 'K', 'eV', 'T', 'J'].includes(unit)) return (figures(value) + ' ' + unit).trim();
  if (value === 0) return '0 ' + unit;
  const size = Math.abs(value);
  if (unit === 's' && size >= 1) return plain(value, 6) + ' s';
  const step = PREFIXES.find((one) => size >= one[0] * 0.99995) || PREFIXES[PREFIXES.length - 1];
  return figures(value / step[0]) + ' ' + step[1] + unit;
}

function shortVolts(value) {
  const text = Math.abs(value) < 1000 ? plain(value, 3) : value.toFixed(0);
  return Number(text) ? text.replace('-', '\u2212') : '0';
}
