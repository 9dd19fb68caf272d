import { mkdir, mkdtemp, readFile, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { Page } from 'playwright-core';
import { build } from 'vite';
import { afterAll, afterEach, beforeAll, describe, expect, it } from 'vitest';
import { MMHG } from '../../src/core/units.ts';
import { VTP } from '../../src/formats/tree/vtp.ts';
import { startViewServer, type ViewServer } from '../../src/node/view-server.ts';
import type { ViewerState } from '../../viewer/application.ts';
import { BROWSER_AVAILABLE, type HeadlessBrowser, openBrowser } from '../support/browser.ts';
import { countDrawn, differingPart, readPng } from '../support/pictures.ts';
import { twoFacingTrees } from '../support/viewer-tree.ts';

/** VESSELWRIGHT_UPDATE_PICTURES=1 writes the reference instead; look at it before it is committed. */
const REFERENCE = new URL('../fixtures/viewer/two-trees.png', import.meta.url);
const UPDATE = process.env.VESSELWRIGHT_UPDATE_PICTURES === '1';
/** Part of the drawn pixels that may differ. Between npm's Chromium 143 and Debian's 156 none did. */
const TOLERANCE = 0.02;

const record = twoFacingTrees();
const { forest } = record;
const field = record.field!;

let folder: string;
let headless: HeadlessBrowser;
let server: ViewServer;
let bare: ViewServer;
let page: Page;
let troubles: string[];
let asked: string[];

async function openPage(url: string): Promise<void> {
  page = await headless.browser.newPage({ viewport: { width: 960, height: 660 }, acceptDownloads: true });
  troubles = [];
  asked = [];
  page.on('console', (message) => {
    if (message.type() === 'error' || (message.type() === 'warning' && !message.text().includes('GPU stall'))) {
      troubles.push(message.text());
    }
  });
  page.on('pageerror', (error) => troubles.push(error.message));
  page.on('request', (request) => asked.push(request.url()));
  await page.goto(url);
}

/** A page that closes gives its drawing context back, and the browser may warn of that: no word of the viewer's. */
async function closePage(): Promise<void> {
  page.removeAllListeners('console');
  await page.close();
}

const state = (): Promise<ViewerState> => page.evaluate(() => window.vesselwrightViewer.state());

/** Waits until the drawing has come to rest. */
async function rest(phase = 'ready'): Promise<void> {
  await page.waitForFunction(
    (wanted) => {
      const now = window.vesselwrightViewer?.state();
      return now?.phase === wanted && now.settled;
    },
    phase,
    { timeout: 30_000 },
  );
}

/** The drawing alone: legend and panel use the machine's fonts. */
async function drawing() {
  await page.waitForFunction(() => window.vesselwrightViewer?.state().phase === 'ready');
  const address = await page.evaluate(async () => {
    const blob = await window.vesselwrightViewer.picture({ legend: false });
    return await new Promise<string>((done) => {
      const reader = new FileReader();
      reader.onload = () => done(reader.result as string);
      reader.readAsDataURL(blob);
    });
  });
  const bytes = Buffer.from(address.slice(address.indexOf(',') + 1), 'base64');
  return { bytes, png: readPng(bytes) };
}

/** Label and value of each line of the vessel panel. */
const panel = () =>
  page.evaluate(() => {
    const lines: Record<string, string> = {};
    for (const label of document.querySelectorAll('#vessel dt')) {
      lines[label.textContent ?? ''] = label.nextElementSibling?.textContent ?? '';
    }
    return { title: document.querySelector('#vessel h2')?.textContent ?? '', lines };
  });

const setSlider = (id: string, value: number) => page.locator(`#${id}`).fill(String(value));

const four = (x: number) => String(Number(x.toPrecision(4)));

describe.skipIf(!BROWSER_AVAILABLE)('the viewer in a browser', () => {
  beforeAll(async () => {
    folder = await mkdtemp(join(tmpdir(), 'viewer-'));
    const viewerDir = join(folder, 'viewer');
    const root = new URL('../../viewer', import.meta.url).pathname;
    await build({ configFile: join(root, 'vite.config.ts'), logLevel: 'warn', build: { outDir: viewerDir } });
    for (const run of ['two-trees', 'unsolved', 'broken']) await mkdir(join(folder, run));
    const tree = VTP.encode(record)[0]!.bytes;
    await writeFile(join(folder, 'two-trees', 'tree.vtp'), tree);
    await writeFile(join(folder, 'unsolved', 'tree.vtp'), VTP.encode(twoFacingTrees(false))[0]!.bytes);
    await writeFile(join(folder, 'broken', 'tree.vtp'), tree.subarray(0, 3000));
    const runs = ['two-trees', 'unsolved', 'broken'].map((name) => ({ name, folder: join(folder, name) }));
    server = await startViewServer({ runs, viewerDir, port: 0 });
    bare = await startViewServer({ runs: [], viewerDir, port: 0 });
    headless = await openBrowser();
  });

  afterEach(async () => {
    await closePage();
    expect(troubles).toEqual([]);
    for (const url of asked) expect(url).toMatch(/^(http:\/\/127\.0\.0\.1:\d+\/|blob:|data:)/);
  });

  afterAll(async () => {
    await headless?.close();
    await server?.close();
    await bare?.close();
    await rm(folder, { recursive: true, force: true });
  });

  it('draws the tree as the reference shows it, and an empty scene would not pass', async () => {
    await openPage(server.url);
    const { bytes, png } = await drawing();
    expect(await state()).toMatchObject({
      phase: 'ready',
      result: 'two-trees',
      trees: 2,
      // Two trees of 2^8 − 1 vessels.
      vessels: 2 * (2 ** 8 - 1),
      shown: 2 * (2 ** 8 - 1),
      quantity: 'pressure',
      selected: -1,
    });
    if (UPDATE) await writeFile(REFERENCE, bytes);
    const reference = readPng(await readFile(REFERENCE));
    expect(countDrawn(reference)).toBeGreaterThan(10_000);
    expect(differingPart(reference, png)).toBeLessThan(TOLERANCE);

    // The comparison sees what it should see: no vessels, some vessels gone, other colours, another view.
    await page.locator('#ghost').uncheck();
    await setSlider('lowest-order', 8);
    expect(differingPart(reference, (await drawing()).png)).toBeGreaterThan(10 * TOLERANCE);
    await setSlider('lowest-order', 1);
    await page.locator('#ghost').check();
    await rest();
    expect(differingPart(reference, (await drawing()).png)).toBeLessThan(TOLERANCE);
    await page.locator('#quantity').selectOption('order');
    expect(differingPart(reference, (await drawing()).png)).toBeGreaterThan(10 * TOLERANCE);
    await page.locator('#quantity').selectOption('pressure');
    await page.locator('#drawing').press('ArrowLeft');
    expect(differingPart(reference, (await drawing()).png)).toBeGreaterThan(10 * TOLERANCE);
    await closePage();
    expect(troubles).toEqual([]);
    await openPage(bare.url);
    await rest('empty');
    await page.addStyleTag({ content: '#empty { visibility: hidden }' });
    const empty = readPng(await page.locator('#view').screenshot());
    expect(countDrawn(empty)).toBe(0);
    expect(differingPart(reference, empty)).toBeGreaterThan(0.5);
  });

  it('shows the numbers of the vessel that is clicked, and its way back', async () => {
    await openPage(server.url);
    await rest();
    // The trunks are in front of all others, so their middles are in sight. Vessel v of tree t is row v + t + 1.
    for (const [vessel, row, name] of [
      [0, 1, 'supply:0'],
      [255, 257, 'drain:255'],
    ] as const) {
      const place = await page.evaluate((v) => window.vesselwrightViewer.screenOf(v), vessel);
      await page.mouse.click(place.x, place.y);
      await rest();
      expect(await state()).toMatchObject({ selected: vessel, way: [vessel] });
      const { title, lines } = await panel();
      expect(title).toBe(`Vessel ${name}`);
      // 3 mm trunk of 260 µm carrying 2e-8 m³/s = 1.2 mL/min.
      expect(lines.Radius).toBe('260 µm');
      expect(lines.Length).toBe('3000 µm');
      expect(lines.Flow).toBe('1.2 mL/min');
      const root = field.pressure[forest.parent[row]!]!;
      const far = field.pressure[row]!;
      const [inflow, outflow] = vessel === 0 ? [root, far] : [far, root];
      expect(lines['Pressure in']).toBe(`${four(inflow / MMHG)} mmHg (${four(inflow)} Pa)`);
      expect(lines['Pressure out']).toBe(`${four(outflow / MMHG)} mmHg (${four(outflow)} Pa)`);
      // τ = 4 µ Q / (π r³), Re = 2 ρ Q / (π r µ).
      const r = 260e-6;
      expect(lines['Wall shear']).toBe(`${four((4 * 3.5e-3 * 2e-8) / (Math.PI * r * r * r))} Pa`);
      expect(lines['Reynolds number']).toBe(four((2 * 1060 * 2e-8) / (Math.PI * r * 3.5e-3)));
      expect(lines['Strahler order']).toBe('8');
      await page.locator('#drawing').press('Escape');
      expect((await state()).selected).toBe(-1);
    }
    const plain = await drawing();

    // A terminal chosen by number: eight vessels back to the root, one point more in the plot.
    await page.locator('#find-vessel').fill('7');
    await page.locator('#find-vessel').press('Enter');
    await rest();
    expect((await state()).way).toEqual([7, 6, 5, 4, 3, 2, 1, 0]);
    const points = await page.locator('#vessel polyline').first().getAttribute('points');
    expect(points?.split(' ').length).toBe(9);
    expect(differingPart(plain.png, (await drawing()).png)).toBeGreaterThan(0.2);
    // A click beside everything selects none.
    const box = (await page.locator('#drawing').boundingBox())!;
    await page.mouse.click(box.x + box.width / 2, box.y + 8);
    await rest();
    expect((await state()).selected).toBe(-1);
    expect(await page.locator('#vessel').isHidden()).toBe(true);
  });

  it('hides by radius and order, cuts with filled faces, and tells supply from drain', async () => {
    await openPage(server.url);
    await rest();
    await page.locator('#ghost').uncheck();
    const all = await drawing();
    await setSlider('thinnest', 500);
    // Half way on the slider is half way between the radii's logarithms.
    const radii = Array.from(forest.radius);
    const limit = Math.sqrt(Math.min(...radii) * Math.max(...radii));
    expect(await page.locator('#thinnest-text').textContent()).toBe(`${four(limit * 1e6)} µm`);
    const wide = radii.filter((r, row) => forest.parent[row]! >= 0 && r >= limit).length;
    expect((await state()).shown).toBe(wide);
    const thick = await drawing();
    expect(countDrawn(thick.png)).toBeLessThan(0.9 * countDrawn(all.png));
    await setSlider('thinnest', 0);
    await setSlider('lowest-order', 3);
    const high = Array.from(record.order).filter((order, row) => forest.parent[row]! >= 0 && order >= 3).length;
    expect((await state()).shown).toBe(high);
    await setSlider('lowest-order', 1);
    expect(differingPart(all.png, (await drawing()).png)).toBe(0);

    await page.locator('#section').check();
    await page.locator('#section-axis').selectOption('1');
    const cut = await drawing();
    expect(countDrawn(cut.png)).toBeLessThan(0.95 * countDrawn(all.png));
    await page.locator('#section-flip').check();
    const other = await drawing();
    expect(countDrawn(other.png)).toBeLessThan(0.99 * countDrawn(all.png));
    expect(differingPart(cut.png, other.png)).toBeGreaterThan(0.2);
    await page.locator('#section').uncheck();

    // Both trunks have one order, so one colour: along the supply's the picture is even, along the drain's it has rings.
    await page.locator('#quantity').selectOption('order');
    const trunks = (await drawing()).png;
    const box = (await page.locator('#view').boundingBox())!;
    const unevenness = async (vessel: number) => {
      const middle = await page.evaluate((v) => window.vesselwrightViewer.screenOf(v), vessel);
      const levels: number[] = [];
      for (let dx = -22; dx <= 22; dx++) {
        // The trunks lie along x, which in this view falls by about one in six.
        const x = Math.round(middle.x - box.x + dx);
        const y = Math.round(middle.y - box.y + dx / 6);
        levels.push(trunks.data[4 * (y * trunks.width + x) + 1]!);
      }
      return Math.max(...levels) - Math.min(...levels);
    };
    expect(await unevenness(0)).toBeLessThan(30);
    expect(await unevenness(255)).toBeGreaterThan(90);

    // Cut across the trunk and looked at along it: the face is filled with the full, unshaded colour.
    await setSlider('lowest-order', 8);
    await page.locator('#section').check();
    await page.locator('#section-flip').check();
    await page.locator('#section-axis').selectOption('0');
    await setSlider('section-offset', 60);
    await page.locator('#section-flip').uncheck();
    await page.locator('#find-vessel').fill('0');
    await page.locator('#find-vessel').press('Enter');
    await page.getByRole('button', { name: 'Look at it' }).click();
    await page.getByRole('button', { name: 'Select none' }).click();
    await page.locator('#drawing').press('x');
    for (let i = 0; i < 6; i++) await page.locator('#drawing').press('+');
    const face = (await drawing()).png;
    const place = await page.evaluate(() => window.vesselwrightViewer.screenOf(0));
    const colour = (dx: number) => {
      const at = 4 * (Math.round(place.y - box.y) * face.width + Math.round(place.x - box.x + dx));
      return [...face.data.subarray(at, at + 3)];
    };
    // One flat colour from the axis to well off it; a round wall would shade from one to the other.
    expect(colour(0)).not.toEqual([...face.data.subarray(0, 3)]);
    expect(colour(12)).toEqual(colour(0));
    expect(colour(-12)).toEqual(colour(0));
  });

  it('colours by each quantity with its unit, and clips the range', async () => {
    await openPage(server.url);
    await rest();
    const titles: Record<string, string> = {};
    for (const id of await page
      .locator('#quantity option')
      .evaluateAll((options) => options.map((option) => (option as HTMLOptionElement).value))) {
      await page.locator('#quantity').selectOption(id);
      await rest();
      titles[id] = (await page.locator('#overlay').getAttribute('aria-label')) ?? '';
      expect((await state()).quantity).toBe(id);
    }
    expect(titles.radius).toContain('Radius (µm), log scale');
    expect(titles.flow).toContain('Flow (mL/min), log scale');
    expect(titles.pressure).toContain('Pressure (mmHg)');
    expect(titles.wallShear).toContain('Wall shear (Pa)');
    expect(titles.transit).toContain('Transit time (ms)');
    expect(Object.keys(titles)).toHaveLength(9);

    await page.locator('#quantity').selectOption('pressure');
    const full = await drawing();
    await page.locator('#low').fill('50');
    await page.locator('#high').fill('55');
    await page.locator('#high').press('Enter');
    await rest();
    const clipped = await state();
    expect(clipped.low).toBeCloseTo(50 * MMHG, 6);
    expect(clipped.high).toBeCloseTo(55 * MMHG, 6);
    expect(differingPart(full.png, (await drawing()).png)).toBeGreaterThan(0.1);
    await page.locator('#log').check();
    await rest();
    expect((await state()).log).toBe(true);
    await page.locator('#full-range').click();
    await rest();
    expect((await state()).high).toBe(Math.max(...field.pressure));
  });

  it('is driven by keys and drawn in parallel too', async () => {
    await openPage(server.url);
    const start = await drawing();
    await page.locator('#drawing').focus();
    let before = start.png;
    for (const key of ['ArrowLeft', 'ArrowUp', '+', 'Shift+ArrowRight', 'x', 'y', 'z', '-']) {
      await page.keyboard.press(key);
      const after = (await drawing()).png;
      expect(differingPart(before, after), key).toBeGreaterThan(0.01);
      before = after;
    }
    await page.keyboard.press('Home');
    expect(differingPart(start.png, (await drawing()).png)).toBeLessThan(0.001);
    await page.locator('#perspective').uncheck();
    await page.locator('#home').click();
    const parallel = await drawing();
    expect(countDrawn(parallel.png)).toBeGreaterThan(10_000);
    // Picking meets the same vessel in a parallel view.
    const place = await page.evaluate(() => window.vesselwrightViewer.screenOf(255));
    await page.mouse.click(place.x, place.y);
    await rest();
    expect((await state()).selected).toBe(255);
    // Every control can be reached, and is named.
    const unnamed = await page.locator('button, input:not([hidden]), select').evaluateAll((controls) =>
      controls
        .map((control) => control as HTMLInputElement)
        .filter((control) => !control.labels?.length && !control.ariaLabel && !control.textContent?.trim())
        .map((control) => control.id),
    );
    expect(unnamed).toEqual([]);
  });

  it('saves a picture with the legend', async () => {
    await openPage(server.url);
    await rest();
    const download = page.waitForEvent('download');
    await page.locator('#save').click();
    const saved = await download;
    expect(saved.suggestedFilename()).toBe('two-trees.png');
    const png = readPng(await readFile(await saved.path()));
    const box = (await page.locator('#drawing').boundingBox())!;
    expect([png.width, png.height]).toEqual([Math.round(box.width), Math.round(box.height)]);
    // It is what the screen shows, legend and all.
    const shown = readPng(await page.locator('#view').screenshot());
    expect(differingPart(shown, png)).toBeLessThan(TOLERANCE);
    const alone = (await drawing()).png;
    expect(countDrawn(png)).toBeGreaterThan(countDrawn(alone));
    expect(differingPart(shown, alone)).toBeGreaterThan(2 * TOLERANCE);
  });

  it('opens what is dropped, switches between results, and says in place what cannot be read', async () => {
    await openPage(`${server.url}?files=run/0/tree.vtp,run/2/tree.vtp`);
    await rest();
    expect((await state()).vessels).toBe(510);
    await page.locator('#result').selectOption('1');
    await rest('error');
    const message = page.getByRole('alert');
    expect(await message.isVisible()).toBe(true);
    expect(await message.textContent()).toContain('run/2/tree.vtp cannot be read.');
    await page.locator('#result').selectOption('0');
    await rest();
    expect(await message.isHidden()).toBe(true);

    // A run's files, dropped: the tree is found among them.
    const bytes = [...(await readFile(join(folder, 'unsolved', 'tree.vtp')))];
    await page.evaluate((content) => {
      const transfer = new DataTransfer();
      transfer.items.add(new File(['{}'], 'report.json'));
      transfer.items.add(new File([new Uint8Array(content)], 'tree.vtp'));
      document.dispatchEvent(new DragEvent('drop', { dataTransfer: transfer, bubbles: true, cancelable: true }));
    }, bytes);
    await page.waitForFunction(() => window.vesselwrightViewer.state().result === 'tree.vtp');
    await rest();
    // Without a solution there is no pressure to colour by.
    expect(await state()).toMatchObject({ vessels: 510, quantity: 'radius' });
    expect(await page.locator('#quantity option[value=pressure]').isDisabled()).toBe(true);

    await page
      .locator('#files')
      .setInputFiles([{ name: 'notes.txt', mimeType: 'text/plain', buffer: Buffer.from('x') }]);
    await rest('error');
    expect(await message.textContent()).toContain('Got no tree file');
    expect(await page.locator('footer').textContent()).toBe(
      'For research and engineering, not for diagnosis or treatment.',
    );
  });
});
