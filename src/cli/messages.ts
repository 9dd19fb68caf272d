import type { MessagePort } from 'node:worker_threads';
import type { Progress } from '../index.ts';

/** Whose turn it is, so that a step that must not be cut short and the end of the work exclude one another. */
export const TURN = { free: 0, committing: 1, ending: 2 } as const;

/** What the thread that does the work tells the thread that talks to the user. */
export type WorkerMessage =
  | { readonly kind: 'out' | 'err'; readonly text: string }
  | { readonly kind: 'progress'; readonly progress: Progress | null }
  /** A path that is to be removed should the work be cut short. */
  | { readonly kind: 'temporary'; readonly path: string }
  /** A snapshot from which the work could go on lies at this path, or is about to. */
  | { readonly kind: 'resumable'; readonly path: string }
  /** From now on Ctrl-C is the normal end. */
  | { readonly kind: 'until-interrupted' }
  | { readonly kind: 'done'; readonly code: number };

/** What the worker is started with. */
export interface WorkerStart {
  readonly argv: readonly string[];
  /** Takes `WorkerMessage`s. */
  readonly port: MessagePort;
  /** One Int32, a value of `TURN`. */
  readonly turn: SharedArrayBuffer;
  readonly showProgress: boolean;
}
