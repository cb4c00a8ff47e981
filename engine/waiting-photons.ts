/** Photons set free in a history that wait for their turn, last in first out. */
import { U, V, W, turn } from '../geometry/index.js';
import { ENERGY, PHOTON_LENGTH, copyPhoton } from './photon.js';
import type { Secondaries } from './physics/secondaries.js';
import { nextUniform, type StreamState } from './random.js';

/** Photons that may wait at a time; more is an error, none is dropped. */
const ROOM = 1024;

export class WaitingPhotons {
  count = 0;
  private readonly layers = new Int32Array(ROOM);
  private readonly photons = new Float64Array(ROOM * PHOTON_LENGTH);
  private readonly photon = new Float64Array(PHOTON_LENGTH);

  /** Lets wait what a collision in `layer` set free; directions are turned from that of the photon that came in. */
  add(secondaries: Secondaries, incoming: Float64Array, layer: number, random: StreamState): void {
    const { photon } = this;
    for (let i = 0; i < secondaries.count; i++) {
      if (this.count >= ROOM) throw new Error(`more than ${ROOM} photons waiting in one history`);
      if (secondaries.opposite[i] === 1) {
        photon[U] = -photon[U];
        photon[V] = -photon[V];
        photon[W] = -photon[W];
      } else {
        copyPhoton(incoming, 0, photon, 0);
        turn(photon, 0.5 * (1 - secondaries.cosine[i]), nextUniform(random));
      }
      photon[ENERGY] = secondaries.energyKeV[i];
      copyPhoton(photon, 0, this.photons, this.count);
      this.layers[this.count] = layer;
      this.count++;
    }
  }

  /** Takes the next photon out into `photon`. Returns the layer it is in. */
  take(photon: Float64Array): number {
    this.count--;
    copyPhoton(this.photons, this.count, photon, 0);
    return this.layers[this.count];
  }
}
