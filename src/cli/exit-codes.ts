/** What the program's exit code says. */
export const EXIT = {
  /** Done, and every promise held. */
  held: 0,
  /** Done, and a check, a comparison or a promise did not hold. */
  broken: 1,
  /** Bad input; nothing was written. */
  input: 2,
  /** A fault of ours. */
  fault: 70,
  /** Interrupted; nothing is half-written. */
  interrupted: 130,
} as const;

/** One line for `--help`. */
export const EXIT_HELP = `Exit codes: 0 done and every promise held; 1 done, and a check, a comparison or a promise did not hold;
2 bad input, nothing written; 70 a fault of the program; 130 interrupted, nothing half-written.`;
