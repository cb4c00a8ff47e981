/** What the summary needs to know of each quantity: where it belongs and whether it scales with the source. */

/** Groups of the summary, in their order. */
export const GROUPS = {
  in: 'What went in',
  out: 'What came out',
  layers: 'What each layer got',
  detectors: 'Detectors',
  dose: 'Dose',
  other: 'Other figures',
} as const;

export type Group = keyof typeof GROUPS;

interface QuantityTraits {
  readonly group: Group;
  /** Grows with the number of source photons; ratios and doses per fluence do not. */
  readonly extensive: boolean;
}

const QUANTITIES: Readonly<Record<string, QuantityTraits>> = {
  incident: { group: 'in', extensive: true },
  transmitted: { group: 'out', extensive: true },
  transmitted_energy: { group: 'out', extensive: true },
  uncollided: { group: 'out', extensive: true },
  reflected: { group: 'out', extensive: true },
  reflected_energy: { group: 'out', extensive: true },
  side_escape: { group: 'out', extensive: true },
  side_escape_energy: { group: 'out', extensive: true },
  deposited_energy: { group: 'layers', extensive: true },
  interacting: { group: 'layers', extensive: true },
  full_energy: { group: 'detectors', extensive: true },
  peak_to_total: { group: 'detectors', extensive: false },
  absolute_full_energy: { group: 'detectors', extensive: false },
  intrinsic_full_energy: { group: 'detectors', extensive: false },
  intrinsic_interacting: { group: 'detectors', extensive: false },
  anticoincidence: { group: 'detectors', extensive: true },
  coincidence: { group: 'detectors', extensive: true },
  anticoincidence_full_energy: { group: 'detectors', extensive: true },
  pair_coincidence: { group: 'detectors', extensive: true },
  sum_interacting: { group: 'detectors', extensive: true },
  sum_full_energy: { group: 'detectors', extensive: true },
};

/** Figures of dose bear the name of their quantity, then what of it they are. */
const DOSE_NAME =
  /^(air_kerma|ambient_dose|effective_dose_ap|dose_transmission|buildup|(narrow_)?(half|tenth)_value_layer)/;

/** Whether a figure belongs to dose. */
export function isDose(quantity: string): boolean {
  return DOSE_NAME.test(quantity);
}

/** The group of a figure; the interactions of a detector layer stand beside its peaks. */
export function groupOf(quantity: string, inDetector: boolean): Group {
  const group = isDose(quantity) ? 'dose' : (QUANTITIES[quantity]?.group ?? 'other');
  return group === 'layers' && inDetector && quantity === 'interacting' ? 'detectors' : group;
}

/** True where a figure per photon times photons per second is a rate; rates of dose have a table of their own. */
export function isExtensive(quantity: string, unit: string): boolean {
  return (QUANTITIES[quantity]?.extensive ?? false) && !/cm/.test(unit);
}
