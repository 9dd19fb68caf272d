import pixelmatch from 'pixelmatch';
import { PNG } from 'pngjs';

/** Pixels of a PNG. */
export const readPng = (bytes: Uint8Array): PNG => PNG.sync.read(Buffer.from(bytes));

/** Pixels that differ from the picture's first one, its background, by more than a little. */
export function countDrawn(picture: PNG): number {
  const { data } = picture;
  let drawn = 0;
  for (let i = 0; i < data.length; i += 4) {
    const difference =
      Math.abs(data[i]! - data[0]!) + Math.abs(data[i + 1]! - data[1]!) + Math.abs(data[i + 2]! - data[2]!);
    if (difference > 24) drawn++;
  }
  return drawn;
}

/**
 * Pixels that differ between two pictures, as a part of those drawn in the first. Pictures of other sizes differ wholly.
 * Differences from smoothing, which vary between browsers, do not count.
 */
export function differingPart(wanted: PNG, got: PNG): number {
  if (wanted.width !== got.width || wanted.height !== got.height) return 1;
  const differing = pixelmatch(wanted.data, got.data, undefined, wanted.width, wanted.height, { threshold: 0.12 });
  return differing / countDrawn(wanted);
}
