import { zipSync } from 'fflate';
import { inputError } from '../../core/errors.ts';
import { encodeText } from '../../core/text.ts';
import { TextWriter } from '../text/writer.ts';
import { type MeshUnit, positionsIn } from './length-unit.ts';
import type { NamedTriangles } from './mesh-surface.ts';

/** Words of the standard for our units. */
const UNIT_WORDS: Readonly<Record<MeshUnit, string>> = { m: 'meter', mm: 'millimeter', um: 'micron' };

/** Bytes of a part that a zip archive of the first kind can count. */
const MOST_BYTES = 0xffff_ffff;

const CONTENT_TYPES =
  '<?xml version="1.0" encoding="UTF-8"?>\n' +
  '<Types xmlns="http://schemas.openxmlformats.org/package/2006/content-types">\n' +
  '  <Default Extension="rels" ContentType="application/vnd.openxmlformats-package.relationships+xml"/>\n' +
  '  <Default Extension="model" ContentType="application/vnd.ms-package.3dmanufacturing-3dmodel+xml"/>\n' +
  '</Types>\n';
const RELATIONSHIPS =
  '<?xml version="1.0" encoding="UTF-8"?>\n' +
  '<Relationships xmlns="http://schemas.openxmlformats.org/package/2006/relationships">\n' +
  '  <Relationship Target="/3D/3dmodel.model" Id="model"' +
  ' Type="http://schemas.microsoft.com/3dmanufacturing/2013/01/3dmodel"/>\n' +
  '</Relationships>\n';

/**
 * A lumen surface as 3MF, for printing: one object of one closed mesh, the unit stated. The same surface gives the same
 * bytes: the archive's times are fixed.
 *
 * @throws InputError where the model is larger than a zip archive can count
 * Source: 3MF Core Specification 1.3: model, resources, object, mesh, build; units micron, millimeter, meter, …; the
 * package of two parts and their relationship after the Open Packaging Conventions (ECMA-376 part 2).
 */
export function encodeThreeMf(surface: NamedTriangles, unit: MeshUnit, name = 'lumen'): Uint8Array {
  const position = positionsIn(surface.position, unit, surface.unit);
  const { triangle } = surface;
  const out = new TextWriter();
  out.add(
    `<?xml version="1.0" encoding="UTF-8"?>\n<model unit="${UNIT_WORDS[unit]}" xml:lang="en-US"` +
      ' xmlns="http://schemas.microsoft.com/3dmanufacturing/core/2015/02">\n' +
      `  <metadata name="Title">${name}</metadata>\n` +
      '  <metadata name="Application">vesselwright</metadata>\n' +
      `  <resources>\n    <object id="1" type="model" name="${name}">\n` +
      '      <mesh>\n        <vertices>\n',
  );
  for (let v = 0; v < position.length; v += 3)
    out.add(`<vertex x="${position[v]}" y="${position[v + 1]}" z="${position[v + 2]}"/>\n`);
  out.add('        </vertices>\n        <triangles>\n');
  for (let t = 0; t < triangle.length; t += 3)
    out.add(`<triangle v1="${triangle[t]}" v2="${triangle[t + 1]}" v3="${triangle[t + 2]}"/>\n`);
  out.add('        </triangles>\n      </mesh>\n    </object>\n  </resources>\n');
  out.add('  <build>\n    <item objectid="1"/>\n  </build>\n</model>\n');
  const model = out.bytes();
  if (model.length > MOST_BYTES)
    throw inputError('too-large', 'lumen.3mf', `got a model of ${model.length} bytes, expected at most ${MOST_BYTES}`);
  return zipSync(
    {
      '[Content_Types].xml': encodeText(CONTENT_TYPES),
      '_rels/.rels': encodeText(RELATIONSHIPS),
      '3D/3dmodel.model': model,
    },
    // Without a zone: read and written as local time, so the same bytes everywhere; noon, which no clock change skips.
    { mtime: '1980-01-01T12:00:00', level: 6 },
  );
}
