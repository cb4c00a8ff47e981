/** The door of the materials folder. */
export type { Constituent, Material } from './material.js';
