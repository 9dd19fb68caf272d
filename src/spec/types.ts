/** Three coordinates or extents in m, or a direction of unit length. */
export type Triple = readonly [number, number, number];

/** A tissue shape in SI. */
export type Shape =
  | { readonly shape: 'box'; readonly min: Triple; readonly max: Triple }
  | { readonly shape: 'sphere'; readonly center: Triple; readonly radius: number }
  | { readonly shape: 'ellipsoid'; readonly center: Triple; readonly radii: Triple }
  | { readonly shape: 'cylinder'; readonly from: Triple; readonly to: Triple; readonly radius: number }
  /** `file` is relative to the spec; `unit` is what one of the file's numbers means. */
  | { readonly shape: 'surface'; readonly file: string; readonly unit: 'm' | 'mm' | 'um' }
  | { readonly shape: 'union'; readonly parts: readonly Shape[] }
  | { readonly shape: 'intersection'; readonly parts: readonly Shape[] }
  | { readonly shape: 'difference'; readonly of: Shape; readonly minus: readonly Shape[] };

/** A part of the tissue and its relative perfusion, ≥ 0. */
export interface DemandPart {
  readonly shape: Shape;
  readonly weight: number;
}

export interface InletSpec {
  /** m; inside the tissue, on its boundary or just outside it. */
  readonly position: Triple;
  /** Unit vector along which the first vessel leaves the root, or null: free where the inlet lies deep enough, else along the inward normal. */
  readonly direction: Triple | null;
  /** Pa at the root. */
  readonly pressure: number;
  /** m³/s through the root, > 0. */
  readonly flow: number;
}

export type TerminalsSpec =
  /** This many terminals, at blue-noise sites. */
  | ({ readonly by: 'count'; readonly count: number; readonly pressure: number | null } & ByTerritory)
  /** As many as blue-noise sites fit whose least spacing is this (m) where demand is 1, and goes with demand^(−1/3). */
  | ({ readonly by: 'spacing'; readonly spacing: number; readonly pressure: number | null } & ByTerritory)
  /** One at each point (m), with its share of the flow (normalised to sum 1; equal where territories decide). */
  | ({
      readonly by: 'points';
      readonly points: readonly Triple[];
      readonly share: readonly number[];
      readonly pressure: number | null;
    } & ByTerritory);

/** How a tree's flow is shared among its terminals. */
export interface ByTerritory {
  /** There, and true: each gets what the tissue nearer to it than to the tree's other terminals demands. */
  readonly byTerritory?: true;
}

export interface TreeSpec {
  /** Letters, digits and `_`, a letter first; unique. */
  readonly name: string;
  readonly kind: 'supply' | 'drain';
  readonly inlet: InletSpec;
  readonly terminals: TerminalsSpec;
}

export type SizingSpec =
  /** Radii that minimise pumping plus maintenance power for the given flows. */
  | { readonly rule: 'least-power' }
  /** r₀^γ = Σ rᵢ^γ with r^γ ∝ flow; scale from one given radius (m), or from the mean terminal pressure. */
  | {
      readonly rule: 'junction-exponent';
      readonly exponent: number;
      readonly scale:
        | { readonly by: 'terminal-radius'; readonly radius: number }
        | { readonly by: 'inlet-radius'; readonly radius: number }
        | { readonly by: 'mean-pressure' };
    }
  /** r₀^γ = Σ rᵢ^γ, split so that every terminal has the asked pressure. */
  | { readonly rule: 'pressure-matched'; readonly exponent: number };

/** `none`, `quick`, `thorough`, or a number of sweeps (what a budget in seconds came to, so that it can be repeated). */
export type RefineSpec = 'none' | 'quick' | 'thorough' | 'annealed' | number;

/** A spec with every default filled in, in SI. */
export interface Spec {
  readonly name: string;
  /** What the spec is for, one line. */
  readonly purpose?: string;
  readonly seed: string;
  readonly tissue: Shape;
  /** Parts that vessels keep out of. */
  readonly forbidden: readonly Shape[];
  /** Relative perfusion: that of a point is the weight of the last part that holds it, 1 where none does. Left out: 1 everywhere. */
  readonly demand?: readonly DemandPart[];
  /** At least one. */
  readonly trees: readonly TreeSpec[];
  readonly blood: {
    readonly viscosity: { readonly law: 'constant' /** Pa·s */; readonly value: number };
    /** kg/m³ */
    readonly density: number;
    /** W/m³, the power that keeping blood costs; part of the cost under every sizing rule. */
    readonly maintenance: number;
  };
  readonly sizing: SizingSpec;
  readonly clearance: {
    /** m between the walls of vessels that share no node, ≥ 0. */
    readonly gap: number;
  };
  readonly junctions: {
    /** rad; least angle between two vessels that leave a node. */
    readonly minAngle: number;
  };
  readonly refine: RefineSpec;
}
