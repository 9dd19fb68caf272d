#!/usr/bin/env node
import { existsSync, rmSync } from 'node:fs';
import { MessageChannel, receiveMessageOnPort, Worker } from 'node:worker_threads';
import { EXIT } from './exit-codes.ts';
import { TURN, type WorkerMessage, type WorkerStart } from './messages.ts';
import type { ProgressBar } from './progress-bar.ts';

/*
 * The command runs in a worker thread, because its work is one long computation: this thread stays free to hear Ctrl-C,
 * to end the work at any moment, and to remove what was half-made. It loads nothing of the library, so that it is ready
 * at once.
 */

/** ms that a step which must not be cut short may take after Ctrl-C. */
const PATIENCE = 10_000;

const turn = new SharedArrayBuffer(4);
const { port1: port, port2: workerPort } = new MessageChannel();
const temporaries = new Set<string>();
const watched = process.stderr.isTTY === true;
let bar: ProgressBar | null = null;
let resumable: string | null = null;
let endsByInterrupt = false;
let code: number | null = null;
let interrupted = false;

for (const signal of ['SIGINT', 'SIGTERM', 'SIGHUP'] as const) process.on(signal, interrupt);
// A reader that stops listening (`| head`) is no fault.
for (const stream of [process.stdout, process.stderr]) stream.on('error', () => {});

const start: WorkerStart = { argv: process.argv.slice(2), port: workerPort, turn, showProgress: watched };
const worker = new Worker(new URL('./command-worker.js', import.meta.url), {
  workerData: start,
  transferList: [workerPort],
});
worker.on('error', fail);
worker.on('exit', finish);
if (watched) bar = new (await import('./progress-bar.ts')).ProgressBar();
port.on('message', hear);

function hear(message: WorkerMessage): void {
  switch (message.kind) {
    case 'out':
      bar?.show(null);
      process.stdout.write(message.text);
      break;
    case 'err':
      bar?.show(null);
      process.stderr.write(message.text);
      break;
    case 'progress':
      bar?.show(message.progress);
      break;
    case 'temporary':
      temporaries.add(message.path);
      break;
    case 'resumable':
      resumable = message.path;
      break;
    case 'until-interrupted':
      endsByInterrupt = true;
      break;
    case 'done':
      code = message.code;
      break;
  }
}

/** Hears what was said and not yet heard, and removes what was half-made. */
function settle(): void {
  for (let next = receiveMessageOnPort(port); next !== undefined; next = receiveMessageOnPort(port)) hear(next.message);
  bar?.show(null);
  for (const path of temporaries) rmSync(path, { recursive: true, force: true });
}

async function interrupt(): Promise<void> {
  if (interrupted) return;
  interrupted = true;
  const flag = new Int32Array(turn);
  while (Atomics.compareExchange(flag, 0, TURN.free, TURN.ending) === TURN.committing) {
    if (Atomics.wait(flag, 0, TURN.committing, PATIENCE) === 'timed-out') break;
  }
  await worker.terminate();
  settle();
  if (endsByInterrupt) process.exit(EXIT.held);
  const goOn =
    resumable === null || !existsSync(resumable) ? '' : `; the same command with --resume goes on from ${resumable}`;
  process.stderr.write(`interrupted: nothing is half-written${goOn}\n`);
  process.exit(EXIT.interrupted);
}

async function fail(error: unknown): Promise<void> {
  code = EXIT.fault;
  settle();
  if ((error as NodeJS.ErrnoException).code === 'ERR_WORKER_OUT_OF_MEMORY') {
    process.stderr.write('out of memory: give more, for instance NODE_OPTIONS=--max-old-space-size=8000 (MB)\n');
    return;
  }
  const { tellFailure } = await import('./failure.ts');
  tellFailure(error, { err: (text) => process.stderr.write(text) });
}

function finish(): void {
  if (interrupted) return;
  settle();
  port.close();
  process.exitCode = code ?? EXIT.fault;
}
