import { InvariantError } from '../../core/errors.ts';
import { decodeText, encodeText } from '../../core/text.ts';
import type { NamedBytes } from '../format.ts';
import { decodeLumenVtp } from './lumen-vtp.ts';
import { lumenFile, type MeshEncodeOptions, type MeshFormat } from './mesh-formats.ts';
import { describeFile } from './mesh-json.ts';

/**
 * The files of a mesh folder and, made of its `lumen.vtp`, those of further formats; `mesh.json` lists them too. What the
 * folder has already is not made again.
 *
 * @throws InputError where a format cannot hold the surface
 */
export function addMeshFormats(
  files: readonly NamedBytes[],
  formats: readonly MeshFormat[],
  options: MeshEncodeOptions = {},
): NamedBytes[] {
  const more = formats.filter((format) => files.every(({ name }) => name !== lumenFile(format)));
  if (more.length === 0) return [...files];
  const bytesOf = (name: string): Uint8Array => {
    const file = files.find((one) => one.name === name);
    if (file === undefined) throw new InvariantError(`addMeshFormats: got a mesh folder without ${name}`);
    return file.bytes;
  };
  const surface = decodeLumenVtp(bytesOf('lumen.vtp'), 'lumen.vtp');
  const made = more.map((format) => ({ name: lumenFile(format), bytes: format.encode(surface, options) }));
  const notes = JSON.parse(decodeText(bytesOf('mesh.json'))) as { files: unknown[] };
  for (const format of more) {
    const colours = format.id === 'glb' ? { colour_by: options.colourBy ?? 'patch' } : {};
    notes.files.push({ ...describeFile(format, surface.unit), ...colours });
  }
  const noted = { name: 'mesh.json', bytes: encodeText(`${JSON.stringify(notes, null, 2)}\n`) };
  return [...files.filter(({ name }) => name !== noted.name), ...made, noted];
}
