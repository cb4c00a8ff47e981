/** Photons of a history that wait, in any number of equal copies: what splitting makes. */
import { PHOTON_LENGTH } from '../photon.js';

/** A photon's greatest depth so far, its own and that of the photons it comes from. */
export const DEEPEST = PHOTON_LENGTH;
export const DEEP_LENGTH = PHOTON_LENGTH + 1;

/** Different photons that may wait at a time; more is an error, none is dropped. */
const ROOM = 1 << 14;

export class DeepPhotons {
  private count = 0;
  private readonly photons = new Float64Array(ROOM * DEEP_LENGTH);
  private readonly layers = new Int32Array(ROOM);
  private readonly copies = new Int32Array(ROOM);

  /** Lets `copies` equal photons wait. */
  add(photon: Float64Array, layer: number, copies: number): void {
    const i = this.count;
    if (i >= ROOM) throw new Error(`more than ${ROOM} photons waiting in one history`);
    const at = i * DEEP_LENGTH;
    for (let slot = 0; slot < DEEP_LENGTH; slot++) this.photons[at + slot] = photon[slot];
    this.layers[i] = layer;
    this.copies[i] = copies;
    this.count = i + 1;
  }

  /** Takes the next photon out into `photon`. Returns the layer it is in, −1 when none waits. */
  take(photon: Float64Array): number {
    if (this.count === 0) return -1;
    const i = this.count - 1;
    const at = i * DEEP_LENGTH;
    for (let slot = 0; slot < DEEP_LENGTH; slot++) photon[slot] = this.photons[at + slot];
    if (--this.copies[i] === 0) this.count = i;
    return this.layers[i];
  }
}
