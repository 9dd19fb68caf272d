/** Numbers of VTK's cell types that a tree is made of: a line of two points, and one of several. */
export const LINE = 3;
export const POLY_LINE = 4;
