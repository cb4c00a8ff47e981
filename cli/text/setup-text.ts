/** The setup of a finished run in a few lines: source, layers, what was switched off. */
import type { Manifest, ManifestLayer, ManifestSource } from '../result/manifest.js';
import { clip } from '../show.js';
import { formatActivity, formatDuration, formatNumber } from './figure-format.js';
import { renderTable, wrap } from './text-table.js';

const MOST_LINES_LISTED = 4;

function describeShape({ kind, shape }: ManifestSource): string {
  const cm = (key: string): string => `${formatNumber(Number(shape[key]))} cm`;
  const offset = Number(shape.offset_cm ?? 0) > 0 ? `, ${cm('offset_cm')} off the axis` : '';
  switch (kind) {
    case 'beam':
      return `beam at ${formatNumber(Number(shape.angle_deg))} degrees from the normal${
        Number(shape.diameter_cm) > 0 ? `, ${cm('diameter_cm')} wide` : ''
      }`;
    case 'diffuse':
      return `diffuse, ${String(shape.law).replaceAll('_', ' ')}`;
    case 'point':
      return `point, ${cm('distance_cm')} in front${offset}`;
    case 'disc':
      return `disc of ${cm('radius_cm')} radius, ${cm('distance_cm')} in front`;
    case 'embedded':
      return `spread through layer ${clip(String(shape.layer))}`;
  }
}

function describeEnergies({ lines, continuum, photons_per_decay: perDecay }: ManifestSource): string {
  if (continuum !== null) {
    const [from, to] = [continuum.energy_low_keV, continuum.energy_high_keV];
    return `spectrum from ${formatNumber(from, 6)} to ${formatNumber(to, 6)} keV`;
  }
  const energies = lines.map((line) => line.energy_keV);
  if (lines.length > MOST_LINES_LISTED) {
    const sum = perDecay === null ? '' : `, ${formatNumber(perDecay)} photons per decay`;
    const range = [Math.min(...energies), Math.max(...energies)].map((energy) => formatNumber(energy, 6));
    return `${lines.length} lines from ${range[0]} to ${range[1]} keV${sum}`;
  }
  return lines
    .map((line) => {
      const share = perDecay === null ? '' : ` (${formatNumber(line.per_decay)} per decay)`;
      return `${formatNumber(line.energy_keV, 6)} keV${share}`;
    })
    .join(', ');
}

function describeEmission(source: ManifestSource): string {
  return `${source.nuclide === null ? '' : `${clip(source.nuclide)}: `}${describeEnergies(source)}`;
}

/** Of an efficiency curve. */
function describeSeries({ lines }: ManifestSource): string {
  const [from, to] = [lines[0], lines[lines.length - 1]].map((line) => formatNumber(line.energy_keV, 6));
  return `${lines.length} energies from ${from} to ${to} keV, one after the other`;
}

function describeLayer(layer: ManifestLayer): string[] {
  const density = layer.density_g_per_cm3;
  return [
    clip(layer.name),
    layer.material === null ? 'vacuum' : clip(layer.material),
    `${formatNumber(layer.thickness_cm, 6)} cm`,
    density === null ? '' : `${formatNumber(density)} g/cm3`,
    layer.radius_cm === null ? '' : `radius ${formatNumber(layer.radius_cm)} cm`,
    layer.detector ? 'detector' : '',
  ];
}

function describeExtent(extent: Manifest['extent']): string[][] {
  if (extent === null) {
    return [];
  }
  const size =
    extent.kind === 'radius'
      ? `radius ${formatNumber(Number(extent.radius_cm))} cm`
      : `${formatNumber(Number(extent.width_cm))} cm by ${formatNumber(Number(extent.height_cm))} cm`;
  return [['extent', size]];
}

/** Lines under "What went in", none wider than `width` save those of layers with long names. */
export function describeSetup(
  { source, stack, extent, physics, energies }: Manifest,
  width: number,
): string[] {
  const off = Object.keys(physics).filter((name) => physics[name] === false);
  const facts: string[][] = [
    ['source', describeShape(source)],
    ['emits', energies === undefined ? describeEmission(source) : describeSeries(source)],
  ];
  if (source.activity_Bq !== null) {
    const time = source.live_time_s === null ? '' : `, counted for ${formatDuration(source.live_time_s)}`;
    facts.push(['activity', `${formatActivity(source.activity_Bq)}${time}`]);
  }
  facts.push(...describeExtent(extent));
  if (off.length > 0) {
    facts.push(['left out', off.map((name) => name.replaceAll('_', ' ')).join(', ')]);
  }
  const rows = facts.flatMap(([name, text]) => labelled(name, wrap(text, width - LABEL_WIDTH)));
  return renderTable([...rows, ...labelled('layers', renderTable(stack.map(describeLayer), 0))]);
}

/** Indent, longest label and gap. */
const LABEL_WIDTH = 12;

function labelled(name: string, lines: readonly string[]): string[][] {
  return lines.map((line, at) => [at === 0 ? name : '', line]);
}
