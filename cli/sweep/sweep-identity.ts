/** What makes two sweeps the same: same points, same figures. A time limit only says when to stop, a title nothing. */
import { createHash } from 'node:crypto';
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import type { Shard } from '../../engine/index.js';
import { packageVersion } from '../version.js';
import { SWEEP_FORMAT, type BeginRecord, type SweepIdentity } from './records.js';
import type { Sweep } from './sweep.js';
import type { SweepFile } from './sweep-reader.js';
import { columnOf } from './values.js';

function identityOf(sweep: Sweep): SweepIdentity {
  const { base, parameters, combine, points, seed, precision, spectra } = sweep;
  const vary = Object.fromEntries(parameters.map(({ name, values }) => [name, values]));
  return JSON.parse(
    JSON.stringify({
      'version of thickset': packageVersion(),
      base: base.raw,
      'spectrum files': spectrumFiles(sweep),
      vary,
      combine,
      points,
      seed,
      precision,
      spectra,
    }),
  ) as SweepIdentity;
}

/** Hashes of the files that points take their source spectra from. */
function spectrumFiles({ base, parameters }: Sweep): Record<string, string> {
  const names = new Set<unknown>([(base.raw as { source?: { spectrum?: unknown } }).source?.spectrum]);
  for (const { path, values } of parameters) {
    if (path.join('.') === 'source.spectrum') values.forEach((value) => names.add(value));
  }
  const files = [...names].filter((name): name is string => typeof name === 'string').sort();
  return Object.fromEntries(
    files.map((name) => [
      name,
      createHash('sha256')
        .update(readFileSync(join(base.directory, name)))
        .digest('hex')
        .slice(0, 16),
    ]),
  );
}

/** The first record of a sweep's journal. */
export function beginRecord({ sweep, text }: SweepFile, shard: Shard | null): BeginRecord {
  const points = Array.from({ length: sweep.points }, (_, point) => point);
  const indices = points.map((point) => sweep.indicesOf(point));
  const parameters = sweep.parameters.map(({ name, values }, at) => {
    const column = columnOf(values);
    return { name, unit: column.unit, values: indices.map((own) => column.values[own[at]]) };
  });
  return {
    kind: 'begin',
    format: SWEEP_FORMAT,
    version: packageVersion(),
    title: sweep.title,
    seed: sweep.seed,
    text,
    baseText: sweep.base.text,
    identity: identityOf(sweep),
    shard,
    spectra: sweep.spectra,
    timeLimitS: sweep.timeLimitS,
    points: sweep.points,
    parameters,
    seeds: points.map((point) => sweep.seedOf(point)),
  };
}
