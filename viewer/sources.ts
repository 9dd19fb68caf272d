/** A tree file that can be read when it is wanted. */
export interface Source {
  /** What the list of results calls it. */
  readonly name: string;
  /** File name, which says the format. */
  readonly file: string;
  readonly read: () => Promise<Uint8Array>;
}

/** Formats of one file; a tree in two tables (.csv) is for the command line. */
const TREE_ENDINGS = ['.vtp', '.vtu', '.swc', '.json'];
/** Files of a run or a mesh folder that may come along and hold no tree. */
const COMPANIONS = ['report.json', 'spec.json', 'mesh.json', 'lumen.vtp'];

/** A file with the folder it was found in; '' where that is not known. */
export interface Found {
  readonly folder: string;
  readonly file: File;
}

/** The tree files among some files: those called tree.vtp where there are any, else all that may be one. */
export function sourcesOfFiles(found: readonly Found[]): Source[] {
  const whole = found.filter(({ file }) => file.name === 'tree.vtp');
  const wanted = whole.length > 0 ? whole : found.filter(({ file }) => mayBeTree(file.name));
  return wanted.map(({ folder, file }) => ({
    name: folder === '' ? file.name : file.name === 'tree.vtp' ? folder : `${folder}/${file.name}`,
    file: file.name,
    read: async () => new Uint8Array(await file.arrayBuffer()),
  }));
}

/** Whether a name is one that a tree file may have. */
export function mayBeTree(name: string): boolean {
  const lower = name.toLowerCase();
  return !COMPANIONS.includes(lower) && TREE_ENDINGS.some((ending) => lower.endsWith(ending));
}

/** Files of a drop, looking into folders two levels deep. Must be called while the drop event is being handled. */
export async function filesOfDrop(transfer: DataTransfer): Promise<Found[]> {
  // The list of items is emptied when the handler returns, so take all entries before the first wait.
  const entries = [...transfer.items].map((item) => item.webkitGetAsEntry()).filter((entry) => entry !== null);
  if (entries.length === 0) return [...transfer.files].map((file) => ({ folder: '', file }));
  const found: Found[] = [];
  for (const entry of entries) await collect(entry, '', 2, found);
  return found;
}

async function collect(entry: FileSystemEntry, folder: string, depth: number, found: Found[]): Promise<void> {
  if (entry.isFile) {
    const file = await new Promise<File>((done, fail) => (entry as FileSystemFileEntry).file(done, fail));
    found.push({ folder, file });
  } else if (depth > 0) {
    const reader = (entry as FileSystemDirectoryEntry).createReader();
    const inner = folder === '' ? entry.name : `${folder}/${entry.name}`;
    // One call gives at most a hundred entries; an empty answer ends the list.
    for (;;) {
      const some = await new Promise<FileSystemEntry[]>((done, fail) => reader.readEntries(done, fail));
      if (some.length === 0) break;
      for (const next of some) await collect(next, inner, depth - 1, found);
    }
  }
}

/** Files chosen with the file button. */
export function filesOfInput(files: FileList): Found[] {
  return [...files].map((file) => ({ folder: '', file }));
}

/**
 * Results that the page was asked to open: `?files=a,b` (addresses of the same server), else what the view server
 * lists. Nothing where the page was not opened by it.
 *
 * @throws Error where `?files=` names another server
 */
export async function sourcesOfPage(page: URL): Promise<Source[]> {
  const asked = page.searchParams.get('files');
  if (asked !== null) {
    return asked
      .split(',')
      .filter((address) => address !== '')
      .map((address) => sourceOfAddress(page, address, address));
  }
  if (!page.protocol.startsWith('http')) return [];
  const answer = await fetch(new URL('runs.json', page)).catch(() => null);
  if (!answer?.ok || !answer.headers.get('content-type')?.includes('json')) return [];
  const runs = (await answer.json()) as { name: string; files: string[]; tree?: string }[];
  return runs.map((run, i) => {
    const tree = run.tree ?? run.files.find(mayBeTree) ?? 'tree.vtp';
    return sourceOfAddress(page, `run/${i}/${encodeURIComponent(tree)}`, run.name);
  });
}

function sourceOfAddress(page: URL, address: string, name: string): Source {
  const url = new URL(address, page);
  if (url.origin !== page.origin) throw new Error(`${address}: got another server, expected a file of this one`);
  return {
    name,
    file: decodeURIComponent(url.pathname.split('/').at(-1)!),
    read: async () => {
      const answer = await fetch(url);
      if (!answer.ok) throw new Error(`${address}: the server answered ${answer.status}`);
      return new Uint8Array(await answer.arrayBuffer());
    },
  };
}
