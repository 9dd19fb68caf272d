import { existsSync, statSync } from 'node:fs';
import { join } from 'node:path';
import type { LumenFiles } from '../index.ts';
import { readBytes } from './system-faults.ts';

/** Whether a path is a folder that holds a lumen mesh. */
export function isMeshFolder(path: string): boolean {
  if (!existsSync(path) || !statSync(path).isDirectory() || existsSync(join(path, 'tree.vtp'))) return false;
  return ['mesh.json', 'lumen.stl', 'boundary.csv'].some((name) => existsSync(join(path, name)));
}

/**
 * Reads the files of a mesh folder that `checkLumen` looks at; those that the folder lacks are null.
 *
 * @throws InputError where `lumen.stl` or `boundary.csv` cannot be read
 */
export function readMesh(path: string): LumenFiles {
  const read = (name: string): Uint8Array => {
    return readBytes(path, join(path, name), 'a file of a mesh folder');
  };
  const may = (name: string): Uint8Array | null => (existsSync(join(path, name)) ? read(name) : null);
  return {
    surface: read('lumen.stl'),
    boundary: read('boundary.csv'),
    network: may('network.csv'),
    notes: may('mesh.json'),
    vtp: may('lumen.vtp'),
    msh: may('lumen.msh'),
    oneSolid: may('lumen_one_solid.stl'),
    negative: may('negative.stl'),
    volume: may('lumen_volume.vtu'),
  };
}
