// The cross section of bremsstrahlung in Born approximation, resolved in the momentum q that the nucleus takes:
// the formula of H. A. Bethe and W. Heitler (formula 1BN of H. W. Koch and J. W. Motz, Rev. Mod. Phys. 31 (1959)
// 920) integrated over the directions of photon and electron at fixed q. A form factor then screens it exactly.
// Units: m = c = hbar = 1; cross sections in alpha r_e^2 Z^2.
import { gaussLegendre } from './gauss-legendre.mjs';

const MOMENTUM_ORDER = 240;
const ANGLE_ORDER = 96;
const momentumRule = gaussLegendre(MOMENTUM_ORDER);
const angleRule = gaussLegendre(ANGLE_ORDER);

/**
 * k dsigma/dk as a sum over q: the weights times the square of (1 - form factor / Z) at each q.
 *
 * @param {number} kinetic kinetic energy of the electron
 * @param {number} share photon energy / kinetic energy, inside (0, 1)
 * @returns {{q: Float64Array, weight: Float64Array}}
 */
export function bornByMomentum(kinetic, share) {
  const state = kinematics(kinetic, share);
  const { k, e, p, p0 } = state;
  const low = Math.log((2 * k) / (e + p) / (p0 + k + p)); // p0 - k - p without cancellation
  const high = Math.log(p0 + k + p);
  const q = new Float64Array(MOMENTUM_ORDER);
  const weight = new Float64Array(MOMENTUM_ORDER);
  for (let i = 0; i < MOMENTUM_ORDER; i++) {
    q[i] = Math.exp((low + high) / 2 + ((high - low) / 2) * momentumRule.x[i]);
    weight[i] = ((high - low) / 2) * momentumRule.w[i] * q[i] * crossSectionPerMomentum(state, q[i]);
  }
  return { q, weight };
}

function kinematics(kinetic, share) {
  const e0 = 1 + kinetic;
  const k = share * kinetic;
  const left = kinetic * (1 - share);
  return { e0, p0: Math.sqrt(kinetic * (kinetic + 2)), k, e: 1 + left, p: Math.sqrt(left * (left + 2)) };
}

/** Integral over the photon direction, in the logarithm of d0 = E0 - p0 cos(theta0). */
function crossSectionPerMomentum(state, q) {
  const { e0, p0, k, p } = state;
  // The momentum p0 - k that electron and nucleus share lies between |p - q| and p + q.
  const shortest = Math.max(p0 - k, Math.abs(q - p));
  const longest = Math.min(p0 + k, q + p);
  if (longest <= shortest) return 0;
  const d0Of = (r) => 1 / (e0 + p0) + ((r - (p0 - k)) * (r + (p0 - k))) / (2 * k);
  const low = Math.log(d0Of(shortest));
  const span = Math.log(d0Of(longest)) - low;
  let sum = 0;
  for (let j = 0; j < ANGLE_ORDER; j++) {
    const d0 = Math.exp(low + (span * (1 + angleRule.x[j])) / 2);
    sum += angleRule.w[j] * d0 * overAzimuth(state, q, d0);
  }
  // d Omega_k = 2 pi d(d0) / p0 ; d Omega_p = q dq dpsi / (r p); the rest of 1BN: (p / p0) / (2 pi)^2 / q^4
  return ((sum * span) / 2) * (p / p0 / (2 * Math.PI * p0)) * (q / (p * q ** 4));
}

/** The bracket of 1BN divided by r, integrated over the azimuth of the final electron about r = p0 - k. */
function overAzimuth({ e0, p0, k, e, p }, q, d0) {
  const forward = e0 - d0; // p0 cos(theta0)
  const r = Math.sqrt(Math.max(0, p0 * p0 + k * k - 2 * k * forward));
  const cosElectron = (r * r + p * p - q * q) / (2 * r * p);
  const sinElectron = Math.sqrt(Math.max(0, (q * q - (r - p) ** 2) * ((r + p) ** 2 - q * q))) / (2 * r * p);
  const cosPhoton = (forward - k) / r;
  const sinPhoton = Math.sqrt(Math.max(0, p0 * p0 - forward * forward)) / r;
  // d = E - p cos(theta) = a - b cos(psi); means of d, 1/d and 1/d^2 over psi
  const a = e - p * cosElectron * cosPhoton;
  const b = p * sinElectron * sinPhoton;
  const root = Math.sqrt(Math.max((a - b) * (a + b), 1e-300));
  const inverse = 1 / root;
  const inverseSquare = a / root ** 3;
  const q2 = q * q;
  const transverse0 = -1 + 2 * e0 * d0 - d0 * d0; // (p0 sin(theta0))^2
  const transverseOverD2 = -inverseSquare + 2 * e * inverse - 1; // of (p sin(theta))^2 / d^2
  const transverseOverD = -inverse + 2 * e - a;
  // p p0 sin(theta) sin(theta0) cos(phi) = constant + slope d
  const slope = forward - k;
  const constant = (p0 * p0 + p * p + k * k - q2) / 2 - k * forward + k * e - e * forward;
  const crossOverD = constant * inverse + slope;
  const bracket =
    (4 * e0 * e0 - q2) * transverseOverD2 +
    ((4 * e * e - q2) * transverse0) / (d0 * d0) -
    (2 * (4 * e * e0 - q2 + 2 * k * k) * crossOverD) / d0 +
    (2 * k * k * (transverseOverD + transverse0 * inverse)) / d0;
  return (2 * Math.PI * bracket) / r;
}

/** The same integrated over q without screening: formula 3BN of Koch and Motz. */
export function bornUnscreened(kinetic, share) {
  const { e0, p0, k, e, p } = kinematics(kinetic, share);
  const log0 = 2 * Math.log(e0 + p0);
  const log1 = 2 * Math.log(e + p);
  const log = 2 * Math.log((e0 * e + p0 * p - 1) / k);
  const tail = ((e0 * e + p0 * p0) / p0 ** 3) * log0 - ((e0 * e + p * p) / p ** 3) * log1;
  const main =
    (8 * e0 * e) / (3 * p0 * p) +
    (k * k * (e0 * e0 * e * e + p0 * p0 * p * p)) / (p0 * p) ** 3 +
    (k / (2 * p0 * p)) * (tail + (2 * k * e0 * e) / (p * p * p0 * p0));
  const rest = (log0 * e) / p0 ** 3 + (log1 * e0) / p ** 3 - (log0 * log1) / (p0 * p);
  return (p / p0) * (4 / 3 - (2 * e0 * e * (p * p + p0 * p0)) / (p * p0) ** 2 + rest + log * main);
}
