import { MessageChannel, type MessagePort, Worker } from 'node:worker_threads';
import { CHUNK, type Crew, type Memory, type ProposalTask, type Spec, type TriangleSurface } from '../index.ts';

/** Slots of the control words that all threads of a crew see. */
export const CREW = {
  /** Number of the task in hand; raised to call the members. */
  task: 0,
  /** Number of the task (upper bits) and of its next chunk (lower bits). */
  next: 1,
  /** Chunks of the task that are done. */
  done: 2,
  /** Number of the last task of which a member could not do a chunk that it had taken. */
  failed: 3,
  slots: 4,
} as const;
/** Seconds without a chunk done after which members are taken to be gone; a chunk takes milliseconds. */
const PATIENCE = 20;
/** Bits of `next` that count chunks. */
export const CHUNK_BITS = 16;

export interface CrewStart {
  readonly control: SharedArrayBuffer;
  readonly port: MessagePort;
  readonly spec: Spec;
  readonly surfaces: ReadonlyMap<string, TriangleSurface>;
}

/** What members are told: a task and the number of its sites. */
export interface CrewCall {
  readonly id: number;
  readonly count: number;
  readonly task: ProposalTask;
}

/** Takes the next chunk of a task; −1 when none is left or another task is in hand. */
export function takeChunk(control: Int32Array, id: number, count: number): number {
  const chunks = Math.ceil(count / CHUNK);
  const mark = (id & ((1 << (31 - CHUNK_BITS)) - 1)) << CHUNK_BITS;
  for (;;) {
    const word = Atomics.load(control, CREW.next);
    const chunk = word - mark;
    if (chunk < 0 || chunk >= chunks) return -1;
    if (Atomics.compareExchange(control, CREW.next, word, word + 1) === word) return chunk;
  }
}

export interface ThreadCrew extends Crew {
  /** Ends the threads. */
  close(): void;
}

/**
 * Starts threads that look for places together with the calling one.
 *
 * @param workers threads altogether, ≥ 2; the calling one is the first
 * Cost: about 40 ms a thread, and the tissue once more in each
 */
export function startCrew(workers: number, spec: Spec, surfaces: ReadonlyMap<string, TriangleSurface>): ThreadCrew {
  const control = new SharedArrayBuffer(4 * CREW.slots);
  const words = new Int32Array(control);
  let members = Array.from({ length: workers - 1 }, () => {
    const { port1, port2 } = new MessageChannel();
    const start: CrewStart = { control, port: port2, spec, surfaces };
    const worker = new Worker(new URL('./crew-worker.js', import.meta.url), {
      workerData: start,
      transferList: [port2],
    });
    worker.unref();
    // A member that cannot start leaves its part to the others: chunks are taken, never given.
    worker.on('error', () => {});
    return { worker, port: port1 };
  });
  const memory: Memory = (bytes) => new SharedArrayBuffer(bytes);
  let id = 0;
  const close = () => {
    Atomics.store(words, CREW.task, -1);
    Atomics.notify(words, CREW.task);
    for (const { port, worker } of members) {
      port.close();
      void worker.terminate();
    }
    members = [];
  };
  return {
    memory,
    work(task, count, mine) {
      if (members.length === 0) {
        mine(0, count);
        return;
      }
      const chunks = Math.ceil(count / CHUNK);
      id++;
      Atomics.store(words, CREW.done, 0);
      Atomics.store(words, CREW.next, (id & ((1 << (31 - CHUNK_BITS)) - 1)) << CHUNK_BITS);
      const call: CrewCall = { id, count, task };
      for (const { port } of members) port.postMessage(call);
      Atomics.store(words, CREW.task, id);
      Atomics.notify(words, CREW.task);
      for (let chunk = takeChunk(words, id, count); chunk >= 0; chunk = takeChunk(words, id, count)) {
        mine(chunk * CHUNK, Math.min(count, (chunk + 1) * CHUNK));
        Atomics.add(words, CREW.done, 1);
      }
      let waited = 0;
      for (let done = Atomics.load(words, CREW.done); done < chunks; done = Atomics.load(words, CREW.done)) {
        waited = Atomics.wait(words, CREW.done, done, 1000) === 'timed-out' ? waited + 1 : 0;
        if (waited < PATIENCE) continue;
        // A member has ended with a chunk in hand. The others are let go too: none may write once this one goes on.
        close();
        mine(0, count);
        return;
      }
      if (Atomics.load(words, CREW.failed) === id) mine(0, count);
    },
    close,
  };
}
