import { receiveMessageOnPort, workerData } from 'node:worker_threads';
import { buildTissue, CHUNK, Desk } from '../index.ts';
import { CREW, type CrewCall, type CrewStart, takeChunk } from './crew.ts';

/* A member of a crew: waits for a task, works on chunks of it until none is left, and waits again; one that fails leaves. */

const { control, port, spec, surfaces } = workerData as CrewStart;
const words = new Int32Array(control);
const desk = new Desk(buildTissue(spec.tissue, surfaces, spec.forbidden, spec.demand));

let fit = true;
for (let last = 0; fit; ) {
  Atomics.wait(words, CREW.task, last);
  last = Atomics.load(words, CREW.task);
  if (last < 0) break;
  let call: CrewCall | null = null;
  for (let got = receiveMessageOnPort(port); got !== undefined; got = receiveMessageOnPort(port)) call = got.message;
  if (call === null) continue;
  let opened = false;
  for (let chunk = takeChunk(words, call.id, call.count); chunk >= 0; chunk = takeChunk(words, call.id, call.count)) {
    try {
      if (!opened) desk.open(call.task);
      opened = true;
      desk.propose(chunk * CHUNK, Math.min(call.count, (chunk + 1) * CHUNK));
    } catch {
      // Out of memory, say. The calling thread does the task anew and meets the same trouble, or none.
      Atomics.store(words, CREW.failed, call.id);
      fit = false;
    }
    Atomics.add(words, CREW.done, 1);
    Atomics.notify(words, CREW.done);
    if (!fit) break;
  }
}
port.close();
