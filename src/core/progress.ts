/** How far a long piece of work has come. */
export interface Progress {
  /** A word for the running stage: `sites`, `growth`, `refine`, `proof`, … */
  readonly stage: string;
  readonly done: number;
  readonly total: number;
}

/** What a long call accepts to report progress and to be stopped. The library never prints and never reads the clock. */
export interface Watch {
  readonly onProgress?: ((progress: Progress) => void) | undefined;
  /** Looked at between steps; any `AbortSignal` fits. */
  readonly signal?: { readonly aborted: boolean } | undefined;
}
