import { InvariantError } from '../core/errors.ts';
import { type Memory, ownMemory } from '../core/memory.ts';
import type { StateIn, StateOut } from '../core/state.ts';

/** A row that an eviction has given back. */
export const FREED = -2;
/** Parent of the node that a cut subtree hangs from until it is hung anew. */
export const LOOSE = -3;

/** Columns of a builder, and what else its radii need, for a reader in another thread. */
export interface BuilderView {
  readonly exponent: number;
  readonly count: number;
  readonly parent: Int32Array;
  readonly child: Int32Array;
  readonly tree: Int32Array;
  readonly position: Float64Array;
  readonly load: Float64Array;
  readonly weight: Float64Array;
  readonly roots: readonly number[];
  readonly inletRadius: readonly number[];
}

/**
 * Rooted binary trees that may still change: the one structure growth and refinement write.
 *
 * Columns as in `Forest`, but rows stand in any order, a node has at most two children, and radii follow from
 * weights: r = inletRadius · (weight / weight of the tree's first vessel)^(1/exponent). Weights add up from the
 * terminals like flows do, so one more terminal changes every radius of its tree without touching its rows.
 */
export class ForestBuilder {
  /** Exponent γ of the junction law that ties weights to radii. */
  readonly exponent: number;
  /** Rows handed out so far, freed ones included. */
  count = 0;
  /** (capacity) parent row, −1 for a root, FREED for a row given back. */
  parent: Int32Array;
  /** (2 · capacity) child rows of row i at 2i and 2i + 1, −1 where there is none; a lone child is at 2i. */
  child: Int32Array;
  /** (capacity) tree index. */
  tree: Int32Array;
  /** (3 · capacity) m. */
  position: Float64Array;
  /** (capacity) sum of the flow shares of the terminals at and below the row. */
  load: Float64Array;
  /** (capacity) measure of r^γ; see above. */
  weight: Float64Array;
  /** Root rows by tree. */
  readonly roots: number[] = [];
  /** m; radius of the first vessel by tree. */
  readonly inletRadius: number[] = [];
  private readonly free: number[] = [];
  private readonly memory: Memory;
  /** Tree from which a subtree is cut at this moment, and the weight that its radii go on to refer to. */
  private cutTree = -1;
  private cutWhole = 0;

  /** @param memory where columns are kept */
  constructor(exponent: number, capacity = 1024, memory: Memory = ownMemory) {
    this.exponent = exponent;
    this.memory = memory;
    this.parent = new Int32Array(memory(4 * capacity));
    this.child = new Int32Array(memory(8 * capacity));
    this.tree = new Int32Array(memory(4 * capacity));
    this.position = new Float64Array(memory(24 * capacity));
    this.load = new Float64Array(memory(8 * capacity));
    this.weight = new Float64Array(memory(8 * capacity));
  }

  /** What another thread needs to read this forest; stale after the next change. */
  view(): BuilderView {
    const { exponent, count, parent, child, tree, position, load, weight } = this;
    const roots = [...this.roots];
    return { exponent, count, parent, child, tree, position, load, weight, roots, inletRadius: [...this.inletRadius] };
  }

  /** Reads another builder's columns from now on; nothing may be changed through this one. */
  adopt(view: BuilderView): void {
    this.count = view.count;
    this.parent = view.parent;
    this.child = view.child;
    this.tree = view.tree;
    this.position = view.position;
    this.load = view.load;
    this.weight = view.weight;
    this.roots.splice(0, this.roots.length, ...view.roots);
    this.inletRadius.splice(0, this.inletRadius.length, ...view.inletRadius);
  }

  /** Saves all that is to be known of the forest; not while a subtree is cut. */
  save(out: StateOut): void {
    const { count } = this;
    out.list('size', 'i32', [count, this.capacity]);
    out.list('roots', 'i32', this.roots);
    out.list('inletRadius', 'f64', this.inletRadius);
    out.list('free', 'i32', this.free);
    out.put('parent', this.parent.subarray(0, count));
    out.put('child', this.child.subarray(0, 2 * count));
    out.put('tree', this.tree.subarray(0, count));
    out.put('position', this.position.subarray(0, 3 * count));
    out.put('load', this.load.subarray(0, count));
    out.put('weight', this.weight.subarray(0, count));
  }

  /** Becomes the forest that was saved. Room for rows is as it was: columns elsewhere are as long. */
  restore(from: StateIn): void {
    const [count, capacity] = from.wholes('size') as unknown as [number, number];
    this.count = count;
    this.allocate(capacity);
    this.roots.splice(0, this.roots.length, ...from.wholes('roots'));
    this.inletRadius.splice(0, this.inletRadius.length, ...from.reals('inletRadius'));
    this.free.length = 0;
    for (const row of from.wholes('free')) this.free.push(row);
    from.wholes('parent', this.parent);
    from.wholes('child', this.child);
    from.wholes('tree', this.tree);
    from.reals('position', this.position);
    from.reals('load', this.load);
    from.reals('weight', this.weight);
  }

  get capacity(): number {
    return this.parent.length;
  }

  /** Adds a root and gives its tree's index. */
  addRoot(x: number, y: number, z: number, inletRadius: number): number {
    const row = this.takeRow(x, y, z);
    const tree = this.roots.length;
    this.parent[row] = -1;
    this.tree[row] = tree;
    this.roots.push(row);
    this.inletRadius.push(inletRadius);
    return tree;
  }

  /** Adds a node below a row that has room for a child; its load and weight are zero until set. */
  addChild(parent: number, x: number, y: number, z: number): number {
    const row = this.takeRow(x, y, z);
    this.parent[row] = parent;
    this.tree[row] = this.tree[parent]!;
    this.linkChild(parent, row);
    return row;
  }

  /** Puts a new node on the tube that ends at a row; it carries what that tube carries. */
  insertAbove(row: number, x: number, y: number, z: number): number {
    const parent = this.parent[row]!;
    const added = this.takeRow(x, y, z);
    this.parent[added] = parent;
    this.tree[added] = this.tree[row]!;
    this.child[2 * added] = row;
    this.load[added] = this.load[row]!;
    this.weight[added] = this.weight[row]!;
    this.replaceChild(parent, row, added);
    this.parent[row] = added;
    return added;
  }

  /** Takes a node with one child out: its child hangs on its parent. */
  spliceOut(row: number): void {
    const only = this.child[2 * row]!;
    if (only < 0 || this.child[2 * row + 1]! >= 0) throw new InvariantError(`spliceOut: row ${row} has not one child`);
    this.replaceChild(this.parent[row]!, row, only);
    this.parent[only] = this.parent[row]!;
    this.freeRow(row);
  }

  /** Takes a terminal off its parent. */
  removeTerminal(row: number): void {
    if (this.child[2 * row]! >= 0) throw new InvariantError(`removeTerminal: row ${row} has children`);
    this.unlinkChild(this.parent[row]!, row);
    this.freeRow(row);
  }

  linkChild(parent: number, row: number): void {
    const at = 2 * parent;
    if (this.child[at]! < 0) this.child[at] = row;
    else if (this.child[at + 1]! < 0) this.child[at + 1] = row;
    else throw new InvariantError(`linkChild: row ${parent} has two children already`);
  }

  unlinkChild(parent: number, row: number): void {
    const at = 2 * parent;
    if (this.child[at] === row) {
      this.child[at] = this.child[at + 1]!;
      this.child[at + 1] = -1;
    } else if (this.child[at + 1] === row) this.child[at + 1] = -1;
    else throw new InvariantError(`unlinkChild: row ${row} is no child of ${parent}`);
  }

  replaceChild(parent: number, old: number, row: number): void {
    if (this.child[2 * parent] === old) this.child[2 * parent] = row;
    else this.child[2 * parent + 1] = row;
  }

  /**
   * Takes a subtree off: the junction that it leaves stays with it as a loose node, its sibling hangs on what is above.
   * Loads and weights above are the caller's to change; radii stay as they are.
   */
  cut(top: number): void {
    const junction = this.parent[top]!;
    const tree = this.tree[top]!;
    const sibling = this.child[2 * junction] === top ? this.child[2 * junction + 1]! : this.child[2 * junction]!;
    if (this.cutTree >= 0 || sibling < 0 || this.parent[junction]! < 0)
      throw new InvariantError(`cut: row ${top} cannot be cut`);
    this.cutTree = tree;
    this.cutWhole = this.weight[this.child[2 * this.roots[tree]!]!]!;
    this.replaceChild(this.parent[junction]!, junction, sibling);
    this.parent[sibling] = this.parent[junction]!;
    this.child[2 * junction] = top;
    this.child[2 * junction + 1] = -1;
    this.parent[junction] = LOOSE;
  }

  /** Hangs a cut subtree on a junction that has room for it; the loose node is kept until `endCut` or `unhang`. */
  hang(top: number, junction: number): void {
    this.parent[top] = junction;
    this.linkChild(junction, top);
  }

  /** Takes back `hang`. */
  unhang(top: number, loose: number): void {
    this.unlinkChild(this.parent[top]!, top);
    this.parent[top] = loose;
  }

  /** Ends a cut whose subtree hangs again; gives the loose node back. */
  endCut(loose: number): void {
    this.freeRow(loose);
    this.cutTree = -1;
  }

  /** Takes back `cut`: the loose node goes back above the sibling it had, on the side that its subtree had. */
  uncut(top: number, sibling: number, wasFirst: boolean): void {
    const junction = this.parent[top]!;
    const above = this.parent[sibling]!;
    this.replaceChild(above, sibling, junction);
    this.parent[junction] = above;
    this.parent[sibling] = junction;
    this.child[2 * junction] = wasFirst ? top : sibling;
    this.child[2 * junction + 1] = wasFirst ? sibling : top;
    this.cutTree = -1;
  }

  freeRow(row: number): void {
    this.parent[row] = FREED;
    this.child[2 * row] = -1;
    this.child[2 * row + 1] = -1;
    this.free.push(row);
  }

  /** m; radius of the tube that ends at a row (of a root: of its first vessel). */
  radius(row: number): number {
    const tree = this.tree[row]!;
    const whole = tree === this.cutTree ? this.cutWhole : this.weight[this.child[2 * this.roots[tree]!]!]!;
    const share = this.weight[row]! / whole;
    const root = this.exponent === 3 ? Math.cbrt(share) : Math.exp(Math.log(share) / this.exponent);
    return this.inletRadius[tree]! * root;
  }

  /** Whether a row is another or lies below it. Cost: O(depth). */
  isBelow(row: number, top: number): boolean {
    for (let at = row; at >= 0; at = this.parent[at]!) if (at === top) return true;
    return false;
  }

  /** Number of children of a row: 0 terminal, 1 bend (or root), 2 junction. */
  childCount(row: number): number {
    return this.child[2 * row]! < 0 ? 0 : this.child[2 * row + 1]! < 0 ? 1 : 2;
  }

  /** Rows of a tree, parents before children, in a fixed order. Cost: O(rows). */
  preorder(tree: number): Int32Array {
    let rows = new Int32Array(1024);
    let size = 0;
    const stack = [this.roots[tree]!];
    while (stack.length > 0) {
      const row = stack.pop()!;
      if (size === rows.length) {
        const wider = new Int32Array(2 * size);
        wider.set(rows);
        rows = wider;
      }
      rows[size++] = row;
      const a = this.child[2 * row]!;
      const b = this.child[2 * row + 1]!;
      if (b >= 0) stack.push(b);
      if (a >= 0) stack.push(a);
    }
    return rows.slice(0, size);
  }

  private takeRow(x: number, y: number, z: number): number {
    let row: number;
    if (this.free.length > 0) row = this.free.pop()!;
    else {
      if (this.count === this.capacity) this.widen();
      row = this.count++;
    }
    this.position[3 * row] = x;
    this.position[3 * row + 1] = y;
    this.position[3 * row + 2] = z;
    this.child[2 * row] = -1;
    this.child[2 * row + 1] = -1;
    this.load[row] = 0;
    this.weight[row] = 0;
    return row;
  }

  private widen(): void {
    const { memory } = this;
    // Doubling costs too much memory where there are many rows.
    const capacity = this.capacity < 1 << 22 ? 2 * this.capacity : this.capacity + (this.capacity >> 1);
    this.parent = widened(this.parent, new Int32Array(memory(4 * capacity)));
    this.child = widened(this.child, new Int32Array(memory(8 * capacity)));
    this.tree = widened(this.tree, new Int32Array(memory(4 * capacity)));
    this.position = widened(this.position, new Float64Array(memory(24 * capacity)));
    this.load = widened(this.load, new Float64Array(memory(8 * capacity)));
    this.weight = widened(this.weight, new Float64Array(memory(8 * capacity)));
  }

  private allocate(capacity: number): void {
    const { memory } = this;
    this.parent = new Int32Array(memory(4 * capacity));
    this.child = new Int32Array(memory(8 * capacity));
    this.tree = new Int32Array(memory(4 * capacity));
    this.position = new Float64Array(memory(24 * capacity));
    this.load = new Float64Array(memory(8 * capacity));
    this.weight = new Float64Array(memory(8 * capacity));
  }
}

function widened<T extends Int32Array | Float64Array>(old: T, next: T): T {
  next.set(old);
  return next;
}
