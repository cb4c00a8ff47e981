// Builds ../subshell-photoelectric.arrow: EPDL97 photoelectric cross sections of K, L1, L2, L3 and of all other
// shells together, thinned to the points that straight lines in ln-ln need.
// Usage: node materials/data/build/subshell-shares.mjs [folder of the fisx tables]
import { join } from 'node:path';
import { Float32, Float64, Uint8 } from 'apache-arrow';
import { writeArrowFile } from './arrow-file.mjs';
import { readSpecFile } from './specfile.mjs';

const MAX_Z = 100;
const FIRST_ENERGY_KEV = 1;
const SHELLS = ['K', 'L1', 'L2', 'L3'];
// Largest error of a left-out point; the two that enter a share stay below 0.1 % together.
const TOLERANCE = 5e-4;

const folder = process.argv[2] ?? '/usr/share/fisx';

/** Points of one curve from its edge on; a curve's last jump is where it starts (outer shells have several). */
function curve(rows, energyOf, valueOf) {
  const points = [];
  for (const row of rows) {
    const point = { energy: energyOf(row), value: valueOf(row) };
    if (!(point.value > 0)) continue;
    if (points.at(-1)?.energy === point.energy) points.pop();
    points.push(point);
  }
  return points;
}

/** Douglas-Peucker in ln-ln: the fewest kept points that leave every other within the tolerance. */
function thinned(points) {
  const keep = new Set([0, points.length - 1]);
  const stack = [[0, points.length - 1]];
  while (stack.length > 0) {
    const [low, high] = stack.pop();
    const [a, b] = [points[low], points[high]];
    let worst = { error: TOLERANCE, at: -1 };
    for (let i = low + 1; i < high; i++) {
      const t = Math.log(points[i].energy / a.energy) / Math.log(b.energy / a.energy);
      const error = Math.abs((a.value * (b.value / a.value) ** t) / points[i].value - 1);
      if (error > worst.error) worst = { error, at: i };
    }
    if (worst.at < 0) continue;
    keep.add(worst.at);
    stack.push([low, worst.at], [worst.at, high]);
  }
  return points.filter((_, i) => keep.has(i));
}

const rows = [];
let top = Infinity;
for (const { number: z, labels, rows: table } of readSpecFile(join(folder, 'EPDL97_CrossSections.dat'))) {
  if (z > MAX_Z) continue;
  const columnOf = (word) => labels.findIndex((label) => label.startsWith(word));
  const energy = columnOf('PhotonEnergy');
  const inner = SHELLS.map((shell) => columnOf(`${shell}(`));
  const first = columnOf('M1(');
  const last = columnOf('AllOthers');
  const used = table.filter(
    (row) => row[energy] >= FIRST_ENERGY_KEV && inner.some((column) => row[column] > 0),
  );
  const outer = (row) => row.slice(first, last + 1).reduce((sum, value) => sum + value, 0);
  [...inner.map((column) => (row) => row[column]), outer].forEach((valueOf, shell) => {
    const points = curve(used, (row) => row[energy], valueOf);
    if (points.length < 2) return;
    if (shell === 0) top = Math.min(top, points.at(-1).energy);
    for (const point of thinned(points)) rows.push({ z, shell, ...point });
  });
}

const column = (name, type, unit, description, pick) => ({
  name,
  type,
  unit,
  description,
  values: rows.map(pick),
});
writeArrowFile(
  new URL('../subshell-photoelectric.arrow', import.meta.url),
  [
    column('z', new Uint8(), '1', 'atomic number', (r) => r.z),
    column('shell', new Uint8(), '', '0 K, 1 L1, 2 L2, 3 L3, 4 all others', (r) => r.shell),
    column('energy_keV', new Float64(), 'keV', 'photon energy', (r) => r.energy),
    column('photoelectric', new Float32(), 'cm2/g', 'photoelectric coefficient of the shell', (r) => r.value),
  ],
  {
    source:
      'EPDL97: D. E. Cullen, J. H. Hubbell and L. Kissel, UCRL-50400 Vol. 6 Rev. 5 (1997), as tabulated in the fisx ' +
      'data package',
  },
);
console.log(`subshell-photoelectric.arrow: ${rows.length} rows; K curves end at ${top} keV or above`);
