/* The part of the Khronos validator of glTF files that tests use; its package declares no types. */
declare module 'gltf-validator' {
  interface Report {
    readonly issues: {
      readonly numErrors: number;
      readonly numWarnings: number;
      readonly numInfos: number;
      readonly numHints: number;
      readonly messages: readonly { readonly code: string; readonly message: string }[];
    };
    readonly info: {
      readonly version: string;
      readonly drawCallCount: number;
      readonly materialCount: number;
      readonly totalTriangleCount: number;
      readonly totalVertexCount: number;
    };
  }
  const validator: { validateBytes(bytes: Uint8Array): Promise<Report> };
  // biome-ignore lint/style/noDefaultExport: the package exports so
  export default validator;
}
