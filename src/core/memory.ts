/** Where columns come from: memory of one's own, or memory that several threads see. */
export type Memory = (bytes: number) => ArrayBufferLike;

export const ownMemory: Memory = (bytes) => new ArrayBuffer(bytes);
