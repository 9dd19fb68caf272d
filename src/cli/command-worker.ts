import { workerData } from 'node:worker_threads';
import type { Progress } from '../index.ts';
import type { Io } from './io.ts';
import { TURN, type WorkerMessage, type WorkerStart } from './messages.ts';
import { main } from './run-command.ts';

/* The thread that does a command's work, so that the main thread can end it at any moment. */

/** ms between two messages of progress. */
const PAUSE = 100;

const { argv, port, turn, showProgress } = workerData as WorkerStart;
const flag = new Int32Array(turn);
const tell = (message: WorkerMessage): void => port.postMessage(message);

let last = Number.NEGATIVE_INFINITY;
let stage: string | null = null;

function tellProgress(progress: Progress | null): void {
  if (!showProgress || (progress === null && stage === null)) return;
  const now = performance.now();
  if (progress !== null && progress.stage === stage && now - last < PAUSE) return;
  last = now;
  stage = progress?.stage ?? null;
  tell({ kind: 'progress', progress });
}

const io: Io = {
  out: (text) => tell({ kind: 'out', text }),
  err: (text) => tell({ kind: 'err', text }),
  progress: tellProgress,
  untilInterrupted: () => {
    tell({ kind: 'until-interrupted' });
    return new Promise(() => {});
  },
  resumable: (path) => tell({ kind: 'resumable', path }),
  temporary: (path) => tell({ kind: 'temporary', path }),
  commit: (step) => {
    // Once the end has begun, this thread waits for it here.
    while (Atomics.compareExchange(flag, 0, TURN.free, TURN.committing) !== TURN.free)
      Atomics.wait(flag, 0, TURN.ending);
    try {
      step();
    } finally {
      Atomics.store(flag, 0, TURN.free);
      Atomics.notify(flag, 0);
    }
  },
};

tell({ kind: 'done', code: await main(argv, io) });
