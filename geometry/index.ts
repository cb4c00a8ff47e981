/** The door of the geometry folder. */
export {
  LEFT_FAR,
  LEFT_FRONT,
  LEFT_SIDE,
  NEVER,
  RAY_LENGTH,
  Track,
  U,
  V,
  W,
  X,
  Y,
  Z,
  clearance,
  crossOut,
  distanceToEdge,
  distanceToPlane,
  enterStack,
  holds,
  isInPlace,
  makeSolidStack,
  move,
  traceThrough,
  type Edge,
  type SolidLayer,
  type SolidStack,
} from './solid-stack.js';
export { pointAlongAxis, turn } from './direction.js';
export { AIM_ACROSS, AIM_ALONG, AIM_LENGTH, AIM_OPENNESS, aimAt, rimsOf } from './aim.js';
export { placeInBeam, placeInDisc, placeInLayer } from './source-shapes.js';
export { discSolidAngleSr } from './solid-angle.js';
