import { lumenFile, type NamedBytes } from '../index.ts';
import { type ColourBy, decodeMesh, type MeshFormat } from './mesh-formats.ts';

/**
 * The files of a mesh folder and, made of its `lumen.vtp`, those of further formats; `mesh.json` lists them too. What the
 * folder has already is not made again.
 *
 * @throws InputError where a format cannot hold the surface
 */
export function addMeshFormats(
  files: readonly NamedBytes[],
  formats: readonly MeshFormat[],
  colourBy: ColourBy | undefined,
): readonly NamedBytes[] {
  const more = formats.filter((format) => files.every(({ name }) => name !== lumenFile(format)));
  if (more.length === 0) return files;
  const bytesOf = (name: string): Uint8Array => files.find((file) => file.name === name)!.bytes;
  const surface = decodeMesh(bytesOf('lumen.vtp'), 'lumen.vtp');
  const made = more.map((format) => ({ name: lumenFile(format), bytes: format.encode(surface, { colourBy }) }));
  const notes = JSON.parse(new TextDecoder().decode(bytesOf('mesh.json'))) as { files: unknown[] };
  for (const format of more) {
    const listed = { name: lumenFile(format), unit: format.unitOf(surface.unit), holds_no: format.drops };
    const [usual] = format.colours;
    notes.files.push(usual === undefined ? listed : { ...listed, colour_by: colourBy ?? usual });
  }
  const noted = { name: 'mesh.json', bytes: new TextEncoder().encode(`${JSON.stringify(notes, null, 2)}\n`) };
  return [...files.filter(({ name }) => name !== noted.name), ...made, noted];
}
