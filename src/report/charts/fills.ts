/** Fills that several pictures share: hatching where nothing was visited, stripes where little is known. */

/** A stripe, with a thin dark edge where it must be seen on pale and on dark ground alike. */
const stripes = (id: string, size: number, turn: number, width: number, colour: string, edge: number) =>
  `<pattern id="${id}" width="${size}" height="${size}" patternUnits="userSpaceOnUse" patternTransform="rotate(${turn})"><rect width="${width}" height="${size}" fill="var(--${colour})"/>${edge > 0 ? `<rect x="${width}" width="${edge}" height="${size}" fill="var(--stripe)"/>` : ''}</pattern>`;

/** `<defs>` with the patterns `hatch`, `veil` (heavy) and `veil-light`. */
export const SHARED_FILLS = `<defs>${stripes('hatch', 6, 45, 1.1, 'hatch', 0)}${stripes('veil', 5, -45, 2.9, 'veil', 0.6)}${stripes('veil-light', 6, -45, 1.2, 'veil', 0.5)}</defs>`;
