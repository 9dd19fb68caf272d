/*
 * The part of the Encoding standard that the library uses. Node and browsers have it; the language's own library does
 * not declare it, and src compiles without the types of either.
 */
declare const TextEncoder: new () => { encode(text: string): Uint8Array<ArrayBuffer> };
declare const TextDecoder: new (
  label: string,
  options?: { readonly fatal?: boolean; readonly ignoreBOM?: boolean },
) => { decode(bytes: Uint8Array): string };

/** UTF-8 bytes of a text. */
export function encodeText(text: string): Uint8Array<ArrayBuffer> {
  return new TextEncoder().encode(text);
}

/** Text of UTF-8 bytes without their byte-order mark; bytes that are not UTF-8 become U+FFFD. */
export function decodeText(bytes: Uint8Array): string {
  return new TextDecoder('utf-8').decode(bytes);
}
