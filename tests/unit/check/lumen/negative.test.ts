import { describe, expect, it } from 'vitest';
import { checkNegative, readNegativeNotes } from '../../../../src/check/lumen/negative.ts';
import { readNetwork } from '../../../../src/check/lumen/network.ts';

/* A cube of 2 mm with corners as an STL would list them, and two channels beside each other. */

const CORNERS = [0, 1, 2, 3, 4, 5, 6, 7].map((i) => [i & 1 ? 2 : 0, i & 2 ? 2 : 0, i & 4 ? 2 : 0]);
const FACES = [
  ...[0, 2, 1, 1, 2, 3, 4, 5, 6, 5, 7, 6, 0, 1, 4, 1, 5, 4],
  ...[2, 6, 3, 3, 6, 7, 0, 4, 2, 2, 4, 6, 1, 3, 5, 3, 7, 5],
];

function stl(faces: readonly number[]): Uint8Array {
  let text = 'solid negative\n';
  for (let t = 0; t < faces.length; t += 3) {
    const corners = [0, 1, 2].map((k) => `vertex ${CORNERS[faces[t + k]!]!.join(' ')}\n`).join('');
    text += `facet normal 0 0 0\nouter loop\n${corners}endloop\nendfacet\n`;
  }
  return new TextEncoder().encode(`${text}endsolid negative\n`);
}

const HEAD = 'segment,from,to,x0,y0,z0,x1,y1,z1,r0_m,r1_m,length_m,flow_m3_s,p0_Pa,p1_Pa';
const channel = (name: string, y: number) => `${name},${name}a,${name}b,0,${y},0,1e-3,${y},0,1e-4,1e-4,1e-3,1e-9,10,5`;
/** Two channels of 0.1 mm, 1 mm from axis to axis: a wall of 0.8 mm. */
const network = readNetwork('network.csv', `${HEAD}\n${channel('0', 0)}\n${channel('1', 1e-3)}\n`);

const stated = { solid_m3: 8e-9, least_wall_between_channels_m: 0.8e-3, least_wall_asked_m: 0 };

function look(faces: readonly number[], notes: object = {}, extensions: unknown = null) {
  const read = readNegativeNotes({ ...stated, ...notes }, extensions);
  const { tallies, unread } = checkNegative(stl(faces), 1e-3, read, network, 20);
  return Object.fromEntries(
    tallies.map((tally) => {
      const why = unread.get(tally);
      return [tally.head.id, (why === undefined ? tally.close() : tally.skip(why)).held];
    }),
  );
}

const HELD = { 'negative-closed': true, 'negative-whole': true, 'negative-volume': true, 'negative-walls': true };

describe('the check of a negative', () => {
  it('holds for a whole cube of its volume', () => expect(look(FACES)).toEqual(HELD));

  it('sees a hole, a triangle turned over, and a solid inside out', () => {
    expect(look(FACES.slice(3))['negative-closed']).toBe(false);
    const turned = [FACES[1]!, FACES[0]!, ...FACES.slice(2)];
    expect(look(turned)['negative-closed']).toBe(false);
    const outside = FACES.map((_, i) => FACES[i % 3 === 0 ? i : i % 3 === 1 ? i + 1 : i - 1]!);
    expect(look(outside)).toMatchObject({ 'negative-closed': true, 'negative-whole': false });
  });

  it('sees another volume than stated, and says where none is', () => {
    expect(look(FACES, { solid_m3: 8.01e-9 })['negative-volume']).toBe(false);
    expect(look(FACES, { solid_m3: undefined })['negative-volume']).toBeNull();
  });

  it('sees a wall thinner than stated or asked', () => {
    expect(look(FACES, { least_wall_between_channels_m: 0.81e-3 })['negative-walls']).toBe(false);
    expect(look(FACES, { least_wall_asked_m: 0.9e-3 })['negative-walls']).toBe(false);
    expect(look(FACES, {}, { diameters: 5 })['negative-walls']).toBeNull();
  });
});
