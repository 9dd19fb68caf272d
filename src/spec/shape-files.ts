import type { Shape, Spec } from './types.ts';

/** The surface files a spec refers to, each once, in the order of first mention; paths as the spec gives them. */
export function shapeFiles(spec: Spec): string[] {
  const files = new Set<string>();
  const demand = (spec.demand ?? []).map((part) => part.shape);
  for (const shape of [spec.tissue, ...spec.forbidden, ...demand]) collectFiles(shape, files);
  return [...files];
}

function collectFiles(shape: Shape, files: Set<string>): void {
  if (shape.shape === 'surface') files.add(shape.file);
  if (shape.shape === 'union' || shape.shape === 'intersection')
    for (const part of shape.parts) collectFiles(part, files);
  if (shape.shape === 'difference') for (const part of [shape.of, ...shape.minus]) collectFiles(part, files);
}
