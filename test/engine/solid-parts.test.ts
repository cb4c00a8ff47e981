import { describe, expect, it } from 'vitest';
import { nextOpticalLength } from '../../engine/optical-length.js';
import { ENERGY, PHOTON_LENGTH, WEIGHT } from '../../engine/photon.js';
import { Secondaries } from '../../engine/physics/secondaries.js';
import { ALEA_CARRY, nextUniform, seedStream } from '../../engine/random.js';
import { WaitingPhotons } from '../../engine/waiting-photons.js';
import { U, V, W, Z } from '../../geometry/index.js';
import { KS_LIMIT, ksOfSamples } from './goodness.js';

function stream(seed: string): Float64Array {
  const state = new Float64Array(4);
  seedStream(state, seed, 0);
  return state;
}

describe('The optical length of a flight', () => {
  it('is −ln u of the stream’s next number to fourteen digits', () => {
    const [random, same] = [stream('log'), stream('log')];
    for (let i = 0; i < 100_000; i++) {
      let u = nextUniform(same);
      if (u < 1 / 1024) u += (nextUniform(same) + 0.5 * ALEA_CARRY) * ALEA_CARRY;
      expect(Math.abs(nextOpticalLength(random) + Math.log(u))).toBeLessThan(2e-14);
    }
    expect(random).toEqual(same);
  });

  it('falls off exponentially', () => {
    const random = stream('exponential');
    const samples = Float64Array.from({ length: 200_000 }, () => nextOpticalLength(random));
    expect(ksOfSamples(samples, (x) => -Math.expm1(-x))).toBeLessThan(KS_LIMIT);
  });
});

describe('Photons that wait', () => {
  const incoming = new Float64Array(PHOTON_LENGTH);
  incoming.set([1, 2, 3, 0.6, 0, 0.8, 9000, 0.25]);

  /** Lets one pair of quanta wait and takes it out again. */
  function pairOf(cosine: number, seed: string): Float64Array[] {
    const waiting = new WaitingPhotons();
    const secondaries = new Secondaries();
    secondaries.push(511, cosine, 0);
    secondaries.push(511, -cosine, 1);
    waiting.add(secondaries, incoming, 4, stream(seed));
    return [0, 1].map(() => {
      const photon = new Float64Array(PHOTON_LENGTH);
      expect(waiting.take(photon)).toBe(4);
      return photon;
    });
  }

  it.each([1, 0.5, 0, -0.999999, -1])(
    'fly exactly back to back when they are a pair, at cosine %d',
    (cosine) => {
      for (let i = 0; i < 50; i++) {
        const [second, first] = pairOf(cosine, `pair ${i}`);
        for (const slot of [U, V, W]) expect(second[slot] + first[slot]).toBe(0);
        const along = first[U] * incoming[U] + first[V] * incoming[V] + first[W] * incoming[W];
        expect(Math.abs(along - cosine)).toBeLessThan(1e-10);
      }
    },
  );

  it('keep place and weight of the one they come from', () => {
    const [photon] = pairOf(0.3, 'weight');
    expect(photon.slice(0, Z + 1)).toEqual(Float64Array.of(1, 2, 3));
    expect([photon[ENERGY], photon[WEIGHT]]).toEqual([511, 0.25]);
  });

  it('are never dropped: too many are an error', () => {
    const waiting = new WaitingPhotons();
    const secondaries = new Secondaries();
    for (let i = 0; i < 200; i++) secondaries.push(30, 0.1, 0);
    const random = stream('many');
    expect(() => {
      for (let i = 0; i < 10; i++) waiting.add(secondaries, incoming, 0, random);
    }).toThrow(/more than 1024 photons waiting/);
  });
});
