import type { StateIn, StateOut } from '../core/state.ts';
import { powerOf } from '../physics/junction.ts';
import { radiusForDrop } from '../physics/poiseuille.ts';
import { askedDrop, sizeTree } from '../sizing/size-tree.ts';
import type { Spec, TreeSpec } from '../spec/types.ts';
import type { ForestBuilder } from '../tree/builder.ts';

/** Rise of R⁴ per e-fold of terminals, over R⁴, taken before the tree itself has shown one. */
const EARLY_RISE = 0.12;

/**
 * Sizes one tree while it grows, under the rules whose radii depend on the whole tree (asked pressures).
 *
 * The first vessel of a tree that drops a given pressure must widen as the tree deepens: R⁴ rises about linearly with
 * ln k. So that old vessels are near their final radius from the start, radii are taken at the R foreseen for the full
 * tree. Between two sizings a new terminal's radius comes from Poiseuille's law and the pressure at its junction.
 */
export class Resizer {
  private readonly spec: Spec;
  private readonly tree: TreeSpec;
  private readonly drop: number;
  private exact = 0;
  /** (capacity) Pa from the root at a row, for the exact radii of the last sizing. */
  private fall: Float64Array = new Float64Array(0);
  private rise = EARLY_RISE;
  private history: { logCount: number; fourth: number }[] = [];

  constructor(spec: Spec, tree: TreeSpec) {
    this.spec = spec;
    this.tree = tree;
    this.drop = askedDrop(tree);
  }

  /**
   * Sets a tree's weights from its geometry and loads.
   *
   * @param order  rows of the tree, parents before children
   * @param served terminals it has
   * @returns m, the first vessel's radius; the caller decides at which the tree is held
   */
  resize(builder: ForestBuilder, order: Int32Array, served: number): number {
    const { spec } = this;
    const n = builder.capacity;
    const whole = builder.load[order[1]!]!;
    const flow = new Float64Array(n);
    const inletFlow = this.tree.inlet.flow;
    for (let k = 1; k < order.length; k++) flow[order[k]!] = (inletFlow * builder.load[order[k]!]!) / whole;
    flow[order[0]!] = inletFlow;
    const radius = new Float64Array(n);
    const rows = { order, parent: builder.parent, position: builder.position, flow };
    const exact = sizeTree(rows, spec, this.tree, served, radius);
    this.exact = exact;
    if (spec.sizing.rule === 'pressure-matched') {
      this.fall = new Float64Array(n);
      for (let k = 1; k < order.length; k++) {
        const row = order[k]!;
        builder.weight[row] = powerOf(radius[row]! / exact, builder.exponent);
        this.fall[row] = this.fall[builder.parent[row]!]! + this.dropAlong(builder, row, flow[row]!, radius[row]!);
      }
      builder.weight[order[0]!] = 1;
    }
    this.note(exact, served);
    return exact;
  }

  /** Weight of a new terminal that leaves a tube at a distance (m) from its near end. */
  terminalWeight(builder: ForestBuilder, row: number, along: number, length: number, share: number): number {
    if (this.spec.sizing.rule !== 'pressure-matched' || this.fall.length === 0) return share;
    const { exponent } = builder;
    const parent = builder.parent[builder.parent[row]!]!;
    const p = builder.position;
    const dx = p[3 * row]! - p[3 * parent]!;
    const dy = p[3 * row + 1]! - p[3 * parent + 1]!;
    const dz = p[3 * row + 2]! - p[3 * parent + 2]!;
    const whole = Math.sqrt(dx * dx + dy * dy + dz * dz);
    const above = this.fall[parent] ?? 0;
    const below = this.fall[row] ?? above;
    const fraction = whole > 0 ? Math.min(1, along / whole) : 0;
    const left = Math.max(this.drop - above - fraction * Math.max(0, below - above), 0.01 * this.drop);
    const tree = builder.tree[row]!;
    const first = builder.child[2 * builder.roots[tree]!]!;
    const flow = (this.tree.inlet.flow * share) / (builder.load[first]! + share);
    const radius = radiusForDrop(flow, length, this.spec.blood.viscosity.value, left);
    return builder.weight[first]! * powerOf(radius / this.exact, exponent);
  }

  /** Tells the pressure at rows that came since the last sizing, so that terminals may hang on them. */
  extend(builder: ForestBuilder, junction: number, site: number, row: number): void {
    if (this.fall.length === 0) return;
    if (this.fall.length < builder.capacity) {
      const wider = new Float64Array(builder.capacity);
      wider.set(this.fall);
      this.fall = wider;
    }
    const above = this.fall[builder.parent[junction]!]!;
    this.fall[junction] = 0.5 * (above + Math.max(above, this.fall[row]!));
    this.fall[site] = this.drop;
  }

  /** Saves all that sizings have left behind. */
  save(out: StateOut): void {
    out.list('numbers', 'f64', [this.exact, this.rise]);
    // Its length too says something: rows beyond it have no pressure yet.
    out.put('fall', this.fall);
    out.list(
      'history',
      'f64',
      this.history.flatMap(({ logCount, fourth }) => [logCount, fourth]),
    );
  }

  restore(from: StateIn): void {
    [this.exact, this.rise] = from.reals('numbers') as unknown as [number, number];
    this.fall = from.reals('fall');
    const history = from.reals('history');
    this.history = [];
    for (let k = 0; k < history.length; k += 2) {
      this.history.push({ logCount: history[k]!, fourth: history[k + 1]! });
    }
  }

  private dropAlong(builder: ForestBuilder, row: number, flow: number, radius: number): number {
    const p = builder.position;
    const parent = builder.parent[row]!;
    const dx = p[3 * row]! - p[3 * parent]!;
    const dy = p[3 * row + 1]! - p[3 * parent + 1]!;
    const dz = p[3 * row + 2]! - p[3 * parent + 2]!;
    const square = radius * radius;
    const length = Math.sqrt(dx * dx + dy * dy + dz * dz);
    return (8 * this.spec.blood.viscosity.value * length * flow) / (Math.PI * square * square);
  }

  /** m; the first vessel's radius foreseen for a tree of so many terminals, from what it has shown so far. */
  foreseenFor(terminals: number): number {
    const last = this.history[this.history.length - 1] ?? { logCount: 0, fourth: 0 };
    const left = Math.max(0, Math.log(terminals) - last.logCount);
    return Math.sqrt(Math.sqrt(last.fourth * (1 + this.rise * left)));
  }

  private note(exact: number, served: number): void {
    const square = exact * exact;
    const fourth = square * square;
    const logCount = Math.log(served);
    const early = this.history.find((entry) => entry.logCount >= logCount - 1.4 && entry.logCount < logCount - 0.3);
    if (early !== undefined && served >= 24) {
      this.rise = Math.min(Math.max((fourth - early.fourth) / ((logCount - early.logCount) * fourth), 0), 0.25);
    }
    this.history.push({ logCount, fourth });
  }
}
