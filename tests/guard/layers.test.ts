import { spawnSync } from 'node:child_process';
import {
  copyFileSync,
  mkdirSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  realpathSync,
  rmSync,
  writeFileSync,
} from 'node:fs';
import { tmpdir } from 'node:os';
import { dirname, join, relative, resolve } from 'node:path';
import { beforeAll, describe, expect, it } from 'vitest';

/*
 * Guards on the guards: one planted fault a layer, each of which the linter must refuse, and one allowed import a layer,
 * which it must let through, so that the rules can neither go silent nor refuse all.
 */

const ROOT = new URL('../..', import.meta.url).pathname;

/** What each folder of src may import of the others; DEVELOPERS.md shows the same table. */
const LAYERS: Record<string, readonly string[]> = {
  core: [],
  tree: ['core'],
  physics: ['core'],
  spec: ['core'],
  tissue: ['core', 'spec'],
  sizing: ['core', 'tree', 'physics', 'spec'],
  room: ['core', 'tree', 'tissue'],
  moves: ['core', 'tree', 'physics', 'tissue', 'room'],
  growth: ['core', 'tree', 'physics', 'spec', 'tissue', 'sizing', 'room', 'moves'],
  refine: ['core', 'tree', 'physics', 'spec', 'tissue', 'sizing', 'room', 'moves'],
  flow: ['core', 'tree', 'physics', 'spec'],
  mesh: ['core', 'tree'],
  volume: ['core', 'tree', 'mesh'],
  formats: ['core', 'tree', 'mesh', 'volume'],
  print: ['core', 'tree', 'spec', 'tissue', 'mesh'],
  check: ['core', 'tree', 'spec'],
  compare: ['core', 'tree'],
  report: ['core', 'tree', 'physics', 'spec'],
};
const FOLDERS = Object.keys(LAYERS);
/** Files at the top of src: they may import every folder of the library, and no folder may import them. */
const TOP = ['index.ts', 'mesh-run.ts', 'rerun.ts', 'run-report.ts', 'run.ts'];
/** Those of them that the edges may not see. */
const HIDDEN = TOP.filter((file) => file !== 'index.ts');

/** Lints planted files in a scratch folder under the project's own rules; gives each file's findings. */
function lintPlanted(planted: ReadonlyMap<string, string>): Map<string, string[]> {
  const scratch = realpathSync(mkdtempSync(join(tmpdir(), 'planted-')));
  try {
    copyFileSync(join(ROOT, '.biome.json'), join(scratch, '.biome.json'));
    for (const [path, text] of planted) {
      mkdirSync(dirname(join(scratch, path)), { recursive: true });
      writeFileSync(join(scratch, path), text);
    }
    const biome = join(ROOT, 'node_modules/@biomejs/biome/bin/biome');
    const options = ['--vcs-enabled=false', '--colors=off', '--max-diagnostics=none', '--reporter=github'];
    const run = spawnSync(process.execPath, [biome, 'lint', ...options, '.'], { cwd: scratch, encoding: 'utf8' });
    const found = new Map<string, string[]>();
    for (const line of run.stdout.split('\n')) {
      const match = /title=lint\/\w+\/(\w+),file=(?:\.\/)?([^,]+),/.exec(line);
      if (match === null) continue;
      const path = relative(scratch, resolve(scratch, match[2]!));
      found.set(path, [...(found.get(path) ?? []), match[1]!]);
    }
    return found;
  } finally {
    rmSync(scratch, { recursive: true, force: true });
  }
}

/** A file that imports one name from each place and uses it. */
function importing(places: readonly string[]): string {
  const lines = places.map((place, k) => `import { x as x${k} } from '${place}';\n`);
  return `${lines.join('')}export const used = [${places.map((_, k) => `x${k}`).join(', ')}];\n`;
}

describe('import rules', () => {
  const planted = new Map<string, string>();
  const inFolders = (folders: readonly string[], up: string) => folders.map((folder) => `${up}/${folder}/planted.ts`);
  const forbidden = (folder: string) => [
    ...inFolders(
      FOLDERS.filter((other) => other !== folder && !LAYERS[folder]!.includes(other)),
      '..',
    ),
    ...inFolders(['cli', 'node'], '..'),
    ...TOP.map((file) => `../${file}`),
  ];
  for (const folder of FOLDERS) {
    planted.set(`src/${folder}/bad.ts`, importing(forbidden(folder)));
    planted.set(`src/${folder}/good.ts`, importing(inFolders(LAYERS[folder]!, '..')));
    planted.set(`src/${folder}/disk.ts`, importing(['node:fs']));
  }
  planted.set('viewer/disk.ts', importing(['node:fs']));
  // The rules go by path, so what is planted bears the names of the files it stands for.
  const below = [...inFolders(FOLDERS, '.'), ...inFolders(['cli', 'node'], '.'), 'node:fs'];
  for (const file of TOP) planted.set(`src/${file}`, importing(below));
  const inside = (src: string) => ['growth/grow.ts', ...HIDDEN].map((path) => `${src}/${path}`);
  for (const edge of ['src/cli', 'src/node']) planted.set(`${edge}/inside.ts`, importing(inside('..')));
  planted.set('viewer/inside.ts', importing(inside('../src')));
  let found = new Map<string, string[]>();
  beforeAll(() => {
    found = lintPlanted(planted);
  });
  const count = (path: string, rule: string) => found.get(path)?.filter((name) => name === rule).length ?? 0;

  it('knows every folder of src', () => {
    const folders = readdirSync(join(ROOT, 'src'), { withFileTypes: true }).filter((entry) => entry.isDirectory());
    expect(folders.map((entry) => entry.name).sort()).toEqual([...FOLDERS, 'cli', 'node'].sort());
  });

  it('knows every file at the top of src', () => {
    expect(
      readdirSync(join(ROOT, 'src'))
        .filter((name) => name.endsWith('.ts'))
        .sort(),
    ).toEqual(TOP);
  });

  for (const file of TOP) {
    it(`${file} may have every folder of the library, but no edge and no node module`, () => {
      expect(count(`src/${file}`, 'noRestrictedImports')).toBe(2);
      expect(count(`src/${file}`, 'noNodejsModules')).toBe(1);
    });
  }

  for (const folder of FOLDERS) {
    it(`${folder} is refused what is not below it, and let have what is`, () => {
      expect(count(`src/${folder}/bad.ts`, 'noRestrictedImports')).toBe(forbidden(folder).length);
      expect(count(`src/${folder}/good.ts`, 'noRestrictedImports')).toBe(0);
      expect(count(`src/${folder}/disk.ts`, 'noNodejsModules')).toBe(1);
    });
  }

  it('keeps node modules out of the viewer, and the inside of the library from the edges', () => {
    expect(count('viewer/disk.ts', 'noNodejsModules')).toBe(1);
    for (const path of ['src/cli/inside.ts', 'src/node/inside.ts', 'viewer/inside.ts']) {
      expect(count(path, 'noRestrictedImports')).toBe(1 + HIDDEN.length);
    }
  });
});

/** Files of the library whose arithmetic shapes results. */
function libraryFiles(folder: string): string[] {
  return readdirSync(join(ROOT, folder), { withFileTypes: true }).flatMap((entry) => {
    const path = join(folder, entry.name);
    if (entry.isDirectory()) return path === 'src/cli' || path === 'src/node' ? [] : libraryFiles(path);
    return path.endsWith('.ts') ? [path] : [];
  });
}

/** Lines of code (comments and texts taken out) that would give other bytes on another engine or another day. */
function unsteady(text: string): string[] {
  const code = text
    .replace(/\/\*[\s\S]*?\*\//g, (comment) => comment.replace(/[^\n]/g, ' '))
    .replace(/\/\/.*$/gm, '')
    .replace(/'(?:[^'\\\n]|\\.)*'|"(?:[^"\\\n]|\\.)*"/g, "''");
  return code
    .split('\n')
    .filter((line) => /Math\.pow|\*\*|Math\.random|Date\.now|new Date|performance\.now/.test(line));
}

describe('steady arithmetic', () => {
  it('finds planted faults', () => {
    expect(unsteady('const a = b ** 2;\nconst c = Math.pow(a, 3);\nconst d = Math.random();\n')).toHaveLength(3);
    expect(unsteady("/** a ** b */\n// Math.pow\nconst text = '**';\n")).toHaveLength(0);
  });

  it('finds none in the library', () => {
    const files = libraryFiles('src');
    expect(files.length).toBeGreaterThan(50);
    const found = files.flatMap((file) =>
      unsteady(readFileSync(join(ROOT, file), 'utf8')).map((line) => `${file}: ${line.trim()}`),
    );
    expect(found).toEqual([]);
  });
});
