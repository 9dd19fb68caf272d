import { fermatPoint } from '../../src/physics/fermat.ts';

/**
 * The plain twin of growth: textbook constructive optimisation. For each new terminal every vessel of the tree is tried
 * as the place to hang it, the junction is put at its best place, and the whole tree is evaluated anew for each try;
 * the cheapest wins. No clearance, no index, no shortcuts: slow, and obviously right.
 *
 * Source: constrained constructive optimisation, W. Schreiner and P. F. Buxbaum (1993), IEEE Trans Biomed Eng 40:482;
 * cost Σ Q^(2/3) L (Gilbert 1967, branched transport); from memory.
 */
export interface PlainNode {
  position: [number, number, number];
  parent: PlainNode | null;
  children: PlainNode[];
  /** Flow of a terminal; ignored elsewhere. */
  share: number;
}

export function plainRoot(position: [number, number, number]): PlainNode {
  return { position, parent: null, children: [], share: 0 };
}

/** Flow through the tube that ends at a node. */
export function plainFlow(node: PlainNode): number {
  return node.children.length === 0 ? node.share : node.children.reduce((sum, child) => sum + plainFlow(child), 0);
}

/** Σ Q^(2/3) L over the whole tree, by visiting all of it. */
export function plainCost(root: PlainNode): number {
  let cost = 0;
  // One visit gives flows and cost together; it still goes through the whole tree.
  const visit = (node: PlainNode): number => {
    let flow = node.children.length === 0 ? node.share : 0;
    for (const child of node.children) flow += visit(child);
    if (node.parent !== null) {
      const [x, y, z] = node.position;
      const [a, b, c] = node.parent.position;
      cost += Math.cbrt(flow * flow) * Math.sqrt((x - a) * (x - a) + (y - b) * (y - b) + (z - c) * (z - c));
    }
    return flow;
  };
  visit(root);
  return cost;
}

/** All nodes that end a tube, in preorder. */
export function plainVessels(root: PlainNode): PlainNode[] {
  const list: PlainNode[] = [];
  const visit = (node: PlainNode) => {
    if (node.parent !== null) list.push(node);
    for (const child of node.children) visit(child);
  };
  visit(root);
  return list;
}

/** Hangs one terminal where the whole tree is cheapest. */
export function plainAttach(root: PlainNode, position: [number, number, number], share: number): void {
  if (root.children.length === 0) {
    root.children.push({ position, parent: root, children: [], share });
    return;
  }
  let bestCost = Infinity;
  let best: (() => void) | null = null;
  for (const vessel of plainVessels(root)) {
    const above = vessel.parent!;
    const at = new Float64Array(3);
    const flow = plainFlow(vessel);
    fermatPoint(
      ...above.position,
      ...vessel.position,
      ...position,
      Math.cbrt((flow + share) * (flow + share)),
      Math.cbrt(flow * flow),
      Math.cbrt(share * share),
      at,
    );
    const hang = () => {
      const junction: PlainNode = { position: [at[0]!, at[1]!, at[2]!], parent: above, children: [vessel], share: 0 };
      above.children[above.children.indexOf(vessel)] = junction;
      vessel.parent = junction;
      junction.children.push({ position, parent: junction, children: [], share });
      return junction;
    };
    const junction = hang();
    const cost = plainCost(root);
    above.children[above.children.indexOf(junction)] = vessel;
    vessel.parent = above;
    if (cost < bestCost) {
      bestCost = cost;
      best = hang;
    }
  }
  best!();
}
