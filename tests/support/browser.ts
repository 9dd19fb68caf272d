import { existsSync } from 'node:fs';
import { mkdtemp, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { type Browser, chromium } from 'playwright-core';

/** Path of a browser to use instead of the one from npm. */
const OWN = process.env.VESSELWRIGHT_BROWSER;

/** Whether a browser can be had: a given one, or the npm package's, which is built for Linux on x64 only. */
export const BROWSER_AVAILABLE =
  OWN === undefined ? process.platform === 'linux' && process.arch === 'x64' : existsSync(OWN);

export interface HeadlessBrowser {
  readonly browser: Browser;
  close(): Promise<void>;
}

/**
 * Starts a headless browser with WebGL 2 in software. The npm package unpacks itself into the system's temporary folder
 * and reuses whatever lies there under its name, so it gets a folder of its own.
 */
export async function openBrowser(): Promise<HeadlessBrowser> {
  const folder = await mkdtemp(join(tmpdir(), 'browser-'));
  const before = process.env.TMPDIR;
  process.env.TMPDIR = folder;
  try {
    const executablePath = OWN ?? (await (await import('@sparticuz/chromium')).default.executablePath());
    const browser = await chromium.launch({ executablePath, args: ['--no-sandbox'] });
    return {
      browser,
      async close() {
        await browser.close();
        await rm(folder, { recursive: true, force: true });
      },
    };
  } finally {
    if (before === undefined) delete process.env.TMPDIR;
    else process.env.TMPDIR = before;
  }
}
