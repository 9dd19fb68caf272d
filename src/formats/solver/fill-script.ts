import { encodeText } from '../../core/text.ts';

/**
 * `fill.geo`: has Gmsh fill `lumen.msh`, which lies beside it, with tetrahedra, the patches' names kept.
 *
 * Source: Gmsh reference manual, "Gmsh scripting commands": Merge, Surface Loop, Volume, Physical Volume.
 */
export function encodeFillScript(): Uint8Array {
  return encodeText(`// Fills the lumen surface beside this file with tetrahedra; patches keep their names:
//   gmsh -3 fill.geo -format msh2 -o filled.msh
Merge "lumen.msh";
s() = Surface{:};
Surface Loop(1) = s();
Volume(1) = {1};
Physical Volume("lumen") = {1};
`);
}
