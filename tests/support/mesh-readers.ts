import { unzipSync } from 'fflate';

/*
 * Small readers of surface files, which share no code with the writers.
 */

/** What a file says of its triangles. */
export interface ReadSurface {
  /** Nine numbers a triangle, as the file has them. */
  readonly corners: readonly (readonly number[])[];
  /** Patch of each triangle by name; null where the file holds none. */
  readonly patch: readonly string[] | null;
  readonly vessel: readonly number[] | null;
  /** The word for the unit of length; null where the file does not say. */
  readonly unit: string | null;
  /** Corners listed, shared or not. */
  readonly vertices: number;
}

const latin = (bytes: Uint8Array): string => new TextDecoder('latin1').decode(bytes);
const lookUp = (points: readonly (readonly number[])[], rows: readonly number[]): number[] =>
  rows.flatMap((row) => [...points[row]!]);

export function readStl(bytes: Uint8Array): ReadSurface {
  const corners: number[][] = [];
  const patch: string[] = [];
  let solid = '';
  let vertices = 0;
  for (const line of latin(bytes).split('\n')) {
    const [word, ...rest] = line.trim().split(' ');
    if (word === 'solid') solid = rest[0]!;
    if (word === 'outer') corners.push([]);
    if (word === 'outer') patch.push(solid);
    if (word === 'vertex') vertices++;
    if (word === 'vertex') corners.at(-1)!.push(...rest.map(Number));
  }
  return { corners, patch, vessel: null, unit: null, vertices };
}

export function readPly(bytes: Uint8Array): ReadSurface {
  const end = latin(bytes.subarray(0, 10_000)).indexOf('end_header\n') + 'end_header\n'.length;
  const head = latin(bytes.subarray(0, end)).split('\n');
  if (head[0] !== 'ply' || head[1] !== 'format binary_little_endian 1.0') throw new Error('no binary PLY');
  const counts = head.filter((line) => line.startsWith('element ')).map((line) => Number(line.split(' ')[2]));
  const properties = head.filter((line) => line.startsWith('property ')).map((line) => line.slice(9));
  const wanted = ['double x', 'double y', 'double z', 'list uchar int vertex_indices', 'int patch', 'int vessel'];
  if (properties.join() !== wanted.join()) throw new Error(`got ${properties}`);
  const names = head.flatMap((line) => /^comment patch (\d+) (\w+)$/.exec(line)?.slice(2) ?? []);
  const view = new DataView(bytes.buffer, bytes.byteOffset);
  const points = Array.from({ length: counts[0]! }, (_, v) =>
    [0, 8, 16].map((k) => view.getFloat64(end + 24 * v + k, true)),
  );
  const corners: number[][] = [];
  const patch: string[] = [];
  const vessel: number[] = [];
  let at = end + 24 * counts[0]!;
  for (let t = 0; t < counts[1]!; t++, at += 21) {
    if (view.getUint8(at) !== 3) throw new Error('no triangle');
    corners.push(
      lookUp(
        points,
        [1, 5, 9].map((k) => view.getInt32(at + k, true)),
      ),
    );
    patch.push(names[view.getInt32(at + 13, true)]!);
    vessel.push(view.getInt32(at + 17, true));
  }
  if (at !== bytes.length) throw new Error(`got ${bytes.length} bytes, expected ${at}`);
  const unit = /unit of length (\w+)/.exec(head.join('\n'))![1]!;
  return { corners, patch, vessel, unit, vertices: points.length };
}

export function readObj(bytes: Uint8Array): ReadSurface {
  const points: number[][] = [];
  const corners: number[][] = [];
  const patch: string[] = [];
  let group = '';
  let unit: string | null = null;
  for (const line of latin(bytes).trimEnd().split('\n')) {
    const [word, ...rest] = line.split(' ');
    if (word === '#') unit = rest.at(-1)!;
    else if (word === 'v') points.push(rest.map(Number));
    else if (word === 'g') group = rest.join(' ');
    else if (word === 'f') {
      corners.push(
        lookUp(
          points,
          rest.map((x) => Number(x) - 1),
        ),
      );
      patch.push(group);
    } else throw new Error(`got ${line}`);
  }
  return { corners, patch, vessel: null, unit, vertices: points.length };
}

export function readThreeMf(bytes: Uint8Array): ReadSurface {
  const parts = unzipSync(bytes);
  const text = (name: string): string => new TextDecoder().decode(parts[name]);
  const target = /Target="\/([^"]+)"/.exec(text('_rels/.rels'))![1]!;
  const model = text(target);
  const points = [...model.matchAll(/<vertex x="([^"]+)" y="([^"]+)" z="([^"]+)"\/>/g)].map((m) =>
    m.slice(1).map(Number),
  );
  const corners = [...model.matchAll(/<triangle v1="(\d+)" v2="(\d+)" v3="(\d+)"\/>/g)].map((m) =>
    lookUp(points, m.slice(1).map(Number)),
  );
  const unit = /<model unit="(\w+)"/.exec(model)![1]!;
  return { corners, patch: null, vessel: null, unit, vertices: points.length };
}

/** MSH 2.2 or 4.1, ASCII; triangles in the file's order. */
export function readMsh(bytes: Uint8Array): ReadSurface & { readonly tags: readonly number[] } {
  const lines = latin(bytes).split('\n');
  const version = lines[1];
  const after = (section: string): number => lines.indexOf(`$${section}`) + 1;
  const wordsOf = (line: number): number[] => lines[line]!.split(' ').map(Number);
  let at = after('PhysicalNames');
  const names = new Map<number, string>();
  for (let n = Number(lines[at++]); n > 0; n--) {
    const [, tag, name] = /^2 (\d+) "(\w+)"$/.exec(lines[at++]!)!;
    names.set(Number(tag), name!);
  }
  const points: number[][] = [];
  const corners: number[][] = [];
  const patch: string[] = [];
  const tags: number[] = [];
  if (version === '2.2 0 8') {
    at = after('Nodes');
    for (let n = Number(lines[at++]); n > 0; n--) points[wordsOf(at)[0]!] = wordsOf(at++).slice(1);
    at = after('Elements');
    for (let n = Number(lines[at++]); n > 0; n--) {
      const [tag, type, count, physical, , ...nodes] = wordsOf(at++);
      if (type !== 2 || count !== 2) throw new Error('no triangle');
      tags.push(tag!);
      corners.push(lookUp(points, nodes));
      patch.push(names.get(physical!)!);
    }
  } else if (version === '4.1 0 8') {
    at = after('Entities');
    const physical = new Map<number, number>();
    const [dots, curves, surfaces, volumes] = wordsOf(at++);
    if (dots !== 0 || curves !== 0 || volumes !== 0) throw new Error('got more than surfaces');
    for (let n = surfaces!; n > 0; n--) {
      const [tag, , , , , , , tagged, name, bounds] = wordsOf(at++);
      if (tagged !== 1 || bounds !== 0) throw new Error('expected one physical tag, no bounding curve');
      physical.set(tag!, name!);
    }
    at = after('Nodes');
    const [nodeBlocks, nodes, least, greatest] = wordsOf(at++);
    for (let b = nodeBlocks!; b > 0; b--) {
      const [, , , count] = wordsOf(at++);
      for (let i = 0; i < count!; i++) {
        const tag = Number(lines[at + i]);
        if (points[tag] !== undefined || tag < least! || tag > greatest!) throw new Error(`node ${tag}`);
        points[tag] = wordsOf(at + count! + i);
      }
      at += 2 * count!;
    }
    if (Object.keys(points).length !== nodes) throw new Error('wrong count of nodes');
    if (lines[at] !== '$EndNodes') throw new Error(`got ${lines[at]}`);
    at = after('Elements');
    const [elementBlocks, elements] = wordsOf(at++);
    for (let b = elementBlocks!; b > 0; b--) {
      const [dimension, entity, type, count] = wordsOf(at++);
      if (dimension !== 2 || type !== 2) throw new Error('no triangles');
      for (let i = 0; i < count!; i++) {
        const [tag, ...three] = wordsOf(at++);
        tags.push(tag!);
        corners.push(lookUp(points, three));
        patch.push(names.get(physical.get(entity!)!)!);
      }
    }
    if (corners.length !== elements) throw new Error('wrong count of elements');
    if (lines[at] !== '$EndElements') throw new Error(`got ${lines[at]}`);
  } else throw new Error(`got version ${version}`);
  const unit = /unit of length (\w+)/.exec(lines.slice(0, 8).join('\n'))![1]!;
  return { corners, patch, vessel: null, unit, vertices: Object.keys(points).length, tags };
}

/** An array of a VTK XML file of appended raw data with UInt64 headers; null where it has none of the name. */
export function vtkArray(bytes: Uint8Array, name: string): ArrayBuffer | null {
  const mark = latin(bytes).indexOf('<AppendedData');
  const head = latin(bytes.subarray(0, mark));
  const found = new RegExp(`Name="${name}"[^>]* offset="(\\d+)"`).exec(head);
  if (found === null) return null;
  const from = bytes.indexOf(0x5f, mark) + 1 + Number(found[1]);
  const size = Number(new DataView(bytes.buffer, bytes.byteOffset).getBigUint64(from, true));
  return bytes.slice(from + 8, from + 8 + size).buffer as ArrayBuffer;
}

/** VTP or VTU. */
export function readVtk(bytes: Uint8Array): ReadSurface {
  const words = (name: string): string[] =>
    latin(new Uint8Array(vtkArray(bytes, name)!))
      .split('\0')
      .slice(0, -1);
  const flat = new Float64Array(vtkArray(bytes, 'Points')!);
  const rows = new Int32Array(vtkArray(bytes, 'connectivity')!);
  const points = Array.from({ length: flat.length / 3 }, (_, v) => [...flat.subarray(3 * v, 3 * v + 3)]);
  const corners = Array.from({ length: rows.length / 3 }, (_, t) =>
    lookUp(points, [...rows.subarray(3 * t, 3 * t + 3)]),
  );
  const types = vtkArray(bytes, 'types');
  if (types !== null && new Uint8Array(types).some((type) => type !== 5)) throw new Error('no triangles');
  const names = words('patch_names');
  const patch = [...new Int32Array(vtkArray(bytes, 'patch_number')!)].map((p) => names[p]!);
  const vessel = [...new Int32Array(vtkArray(bytes, 'vessel')!)];
  return { corners, patch, vessel, unit: words('length_unit')[0]!, vertices: points.length };
}

/** The JSON and the binary chunk of a GLB; refuses one whose lengths, kinds or padding are wrong. */
export function glbChunks(bytes: Uint8Array): { readonly json: GltfJson; readonly binary: Uint8Array } {
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const word = (at: number): number => view.getUint32(at, true);
  if (latin(bytes.subarray(0, 4)) !== 'glTF' || word(4) !== 2 || word(8) !== bytes.length) throw new Error('no GLB');
  const text = word(12);
  if (text % 4 !== 0 || latin(bytes.subarray(16, 20)) !== 'JSON') throw new Error('bad JSON chunk');
  const size = word(20 + text);
  if (size % 4 !== 0 || latin(bytes.subarray(24 + text, 28 + text)) !== 'BIN\0') throw new Error('bad binary chunk');
  if (28 + text + size !== bytes.length) throw new Error('bytes left over');
  const binary = bytes.slice(28 + text);
  return { json: JSON.parse(latin(bytes.subarray(20, 20 + text))) as GltfJson, binary };
}

export interface GltfJson {
  readonly meshes: readonly {
    readonly primitives: readonly {
      readonly attributes: Readonly<Record<string, number>>;
      readonly indices: number;
      readonly material: number;
    }[];
    readonly extras: Readonly<Record<string, unknown>>;
  }[];
  readonly materials: readonly {
    readonly name: string;
    readonly pbrMetallicRoughness: { readonly baseColorFactor: readonly number[] };
  }[];
  readonly accessors: readonly {
    readonly bufferView: number;
    readonly byteOffset: number;
    readonly componentType: number;
    readonly count: number;
    readonly type: 'SCALAR' | 'VEC3' | 'VEC4';
    readonly min?: readonly number[];
    readonly max?: readonly number[];
  }[];
  readonly bufferViews: readonly { readonly byteOffset: number; readonly byteLength: number }[];
}

/** Numbers of an accessor, tuple by tuple. */
export function glbNumbers({ json, binary }: ReturnType<typeof glbChunks>, accessor: number): number[][] {
  const { bufferView, byteOffset, componentType, count, type } = json.accessors[accessor]!;
  const from = json.bufferViews[bufferView]!.byteOffset + byteOffset;
  const width = { SCALAR: 1, VEC3: 3, VEC4: 4 }[type];
  const view = new DataView(binary.buffer, binary.byteOffset);
  const read = {
    5126: (i: number) => view.getFloat32(from + 4 * i, true),
    5125: (i: number) => view.getUint32(from + 4 * i, true),
    5123: (i: number) => view.getUint16(from + 2 * i, true),
  }[componentType]!;
  return Array.from({ length: count }, (_, t) => Array.from({ length: width }, (_, k) => read(width * t + k)));
}

export function readGlb(bytes: Uint8Array): ReadSurface {
  const chunks = glbChunks(bytes);
  const corners: number[][] = [];
  const patch: string[] = [];
  let vertices = 0;
  for (const { attributes, indices, material } of chunks.json.meshes[0]!.primitives) {
    const points = glbNumbers(chunks, attributes.POSITION!);
    vertices += points.length;
    const rows = glbNumbers(chunks, indices).flat();
    for (let t = 0; t < rows.length; t += 3) {
      corners.push(lookUp(points, rows.slice(t, t + 3)));
      patch.push(chunks.json.materials[material]!.name);
    }
  }
  return { corners, patch, vessel: null, unit: null, vertices };
}
