import { inputError } from '../../core/errors.ts';
import { eachLine } from './solids.ts';
import { type StatedSolids, spread } from './vtp-file.ts';

/**
 * Reads a triangle surface whose physical names are its patches from MSH 2.2 text.
 *
 * @throws InputError naming the line that is broken
 * Source: Gmsh manual (public text quoting it), MSH 2.2: `id type ntags physical elementary nodes…`, type 2 a triangle.
 */
export function readMshSolids(file: string, bytes: Uint8Array): StatedSolids {
  let line = 0;
  const lines = eachLine(bytes);
  const fail = (message: string) => inputError('bad-msh', line === 0 ? file : `${file}:${line}`, message);
  const next = (): string => {
    const { value, done } = lines.next();
    if (done === true) throw fail('the file is cut short');
    line++;
    return value.trim();
  };
  const count = (): number => {
    const text = next();
    const got = Number(text);
    if (text === '' || !Number.isInteger(got) || got < 0 || got > bytes.length)
      throw fail(`got "${text.slice(0, 40)}", expected a count`);
    return got;
  };
  const close = (section: string) => {
    const got = next();
    if (got !== `$End${section}`) throw fail(`got "${got.slice(0, 40)}", expected $End${section}`);
  };
  const names: string[] = [];
  const solidOf = new Map<number, number>();
  let unit: string | null = null;
  let points: Float64Array | null = null;
  let corners: Int32Array | null = null;
  let solid = new Int32Array(0);
  while (points === null || corners === null) {
    const section = next();
    if (section === '$MeshFormat') {
      const format = next();
      if (!/^2\.2 0 8$/.test(format)) throw fail(`got format "${format}", expected 2.2 0 8`);
      close('MeshFormat');
    } else if (section === '$Comments') {
      for (let text = next(); text !== '$EndComments'; text = next())
        unit = /unit of length (\w+)/.exec(text)?.[1] ?? unit;
    } else if (section === '$PhysicalNames') {
      for (let left = count(); left > 0; left--) {
        const words = /^2 (\d+) "([^"]*)"$/.exec(next());
        if (words === null) throw fail('expected `2 number "name"`');
        solidOf.set(Number(words[1]), names.push(words[2]!) - 1);
      }
      close('PhysicalNames');
    } else if (section === '$Nodes') {
      const nodes = count();
      points = new Float64Array(3 * nodes);
      for (let v = 0; v < nodes; v++) {
        const words = next().split(' ');
        if (words.length !== 4 || Number(words[0]) !== v + 1) throw fail(`expected node ${v + 1} and three numbers`);
        for (let k = 0; k < 3; k++) points[3 * v + k] = words[k + 1] === '' ? Number.NaN : Number(words[k + 1]);
      }
      close('Nodes');
    } else if (section === '$Elements') {
      const faces = count();
      corners = new Int32Array(3 * faces);
      solid = new Int32Array(faces);
      for (let f = 0; f < faces; f++) {
        const words = next().split(' ').map(Number);
        const patch = solidOf.get(words[3]!);
        if (words.length !== 8 || words[1] !== 2 || words[2] !== 2) throw fail('expected a triangle with two tags');
        if (patch === undefined) throw fail(`got physical surface ${words[3]}, which has no name`);
        solid[f] = patch;
        for (let k = 0; k < 3; k++) corners[3 * f + k] = words[5 + k]! - 1;
      }
      close('Elements');
    } else throw fail(`got "${section.slice(0, 40)}", expected a section of an MSH 2.2 file`);
  }
  return { corner: spread(points, corners, fail), solid, names, unit };
}
