// Builds ../scattering-factors.arrow: form factor F and incoherent function S of the elements 1-100.
// Usage: node materials/data/build/scattering-factors.mjs xraylib.json   (made by dump-xraylib.py)
import { readFileSync } from 'node:fs';
import { Float32, Float64, Uint8 } from 'apache-arrow';
import { writeArrowFile } from './arrow-file.mjs';
import { cubicSpline } from './spline.mjs';

const MAX_Z = 100;
const MAX_TABULATED_Z = 98;
// Below it the tabulated nodes are dense and the package's own spline is kept; above it that spline, linear in F,
// rings between sparse nodes and turns negative, so a spline in ln F - ln x goes through the nodes instead.
const SPLINE_START = 1.5;
// At these nodes the packaged F is the straight line between its neighbours (exactly so for most elements from
// nitrogen on), 2 to 22 % above the curve through the others; they are left out. Lighter elements have true values.
const INTERPOLATED_NODES = new Set([3, 4, 8]);
const FIRST_Z_WITH_INTERPOLATED_NODES = 7;

const dump = JSON.parse(readFileSync(process.argv[2], 'utf8'));
const { x, formFactorNodesX } = dump;

function formFactor(element) {
  const nodes = formFactorNodesX
    .map((at, i) => [at, element.formFactorNodes[i]])
    .filter(([at]) => element.z < FIRST_Z_WITH_INTERPOLATED_NODES || !INTERPOLATED_NODES.has(at));
  const inLogs = cubicSpline(
    nodes.map(([at]) => Math.log(at)),
    nodes.map(([, value]) => Math.log(value)),
  );
  return x.map((at, i) => (at <= SPLINE_START ? element.formFactor[i] : Math.exp(inLogs(Math.log(at)))));
}

/** Never falling and never above Z, as S is: the packaged spline overshoots by up to 2e-4 near Z. */
function risingTo(z, values) {
  let largest = 0;
  return values.map((value) => (largest = Math.max(largest, Math.min(value, z))));
}

/** The curve of the heaviest tabulated element scaled as a Thomas-Fermi atom, a function of x / Z^(1/3) times Z. */
function scaled(curve, z, first) {
  const inLogs = cubicSpline(x.map(Math.log), curve.map(Math.log));
  const ratio = z / MAX_TABULATED_Z;
  return x.map((at) => {
    const from = Math.log(at / Math.cbrt(ratio));
    return from < Math.log(x[0]) ? first(ratio, at) : ratio * Math.exp(inLogs(from));
  });
}

const tabulated = dump.elements
  .filter(({ z }) => z <= MAX_TABULATED_Z)
  .map((element) => ({ z: element.z, f: formFactor(element), s: risingTo(element.z, element.incoherent) }));
const heaviest = tabulated.at(-1);
for (let z = MAX_TABULATED_Z + 1; z <= MAX_Z; z++) {
  const f = scaled(heaviest.f, z, (ratio) => ratio * heaviest.f[0]);
  const s = scaled(heaviest.s, z, (ratio) => ratio * heaviest.s[0] * ratio ** (-2 / 3));
  tabulated.push({ z, f, s: risingTo(z, s) });
}

const rows = tabulated.flatMap(({ z, f, s }) => [
  { z, x: 0, f: z, s: 0 },
  ...x.map((at, i) => ({ z, x: at, f: f[i], s: s[i] })),
]);
for (const row of rows) {
  if (!(row.f > 0 && row.f <= row.z && row.s >= 0 && row.s <= row.z)) throw new Error(JSON.stringify(row));
}

writeArrowFile(
  new URL('../scattering-factors.arrow', import.meta.url),
  [
    { name: 'z', type: new Uint8(), unit: '1', description: 'atomic number', values: rows.map((r) => r.z) },
    {
      name: 'x',
      type: new Float64(),
      unit: '1/angstrom',
      description: 'momentum transfer sin(theta/2)/lambda',
      values: rows.map((r) => r.x),
    },
    {
      name: 'form_factor',
      type: new Float32(),
      unit: '1',
      description: 'atomic form factor F(x, Z)',
      values: rows.map((r) => r.f),
    },
    {
      name: 'incoherent_function',
      type: new Float32(),
      unit: '1',
      description: 'incoherent scattering function S(x, Z)',
      values: rows.map((r) => r.s),
    },
  ],
  {
    source:
      'J. H. Hubbell et al., J. Phys. Chem. Ref. Data 4 (1975) 471 and J. H. Hubbell and I. Overbo, ibid. 8 (1979) 69, ' +
      'as tabulated in the xraylib data package; elements 99 and 100 scaled from 98',
  },
);
console.log(`scattering-factors.arrow: ${rows.length} rows`);
