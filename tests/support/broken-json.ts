import { type BrokenSpec, bent, edited, SOUND_TEXT } from './bend-spec.ts';

/** Texts that are not JSON, with the line and column of the break. */
export const BROKEN_JSON: BrokenSpec[] = [
  { name: 'empty text', text: '', where: 'spec:1:1', says: /empty/ },
  { name: 'only spaces', text: ' \n\t ', where: 'spec:2:3', says: /empty/ },
  { name: 'half a word', text: 'nul', where: 'spec:1:1' },
  { name: 'one brace', text: '{', where: 'spec:1:2', says: /end of the text/ },
  { name: 'cut in the middle', text: SOUND_TEXT.slice(0, SOUND_TEXT.length / 2), where: /^spec:\d+:\d+$/, says: /got/ },
  { name: 'cut by one', text: SOUND_TEXT.slice(0, -1), where: /^spec:\d+:\d+$/, says: /end of the text/ },
  { name: 'cut in a key', text: '{"tiss', where: 'spec:1:7', says: /double quote/ },
  { name: 'cut after a colon', text: '{"tissue":', where: 'spec:1:11' },
  { name: 'cut in an escape', text: '{"name": "a\\', where: 'spec:1:12', says: /escape/ },
  { name: 'bad escape', text: '{"name": "a\\q"}', where: 'spec:1:12', says: /escape/ },
  { name: 'bad unicode escape', text: '{"name": "\\u12g4"}', where: 'spec:1:11', says: /escape/ },
  { name: 'line break in text', text: '{"name": "a\nb"}', where: 'spec:1:12' },
  { name: 'comma before the end', text: '{"a": 1,\n}', where: 'spec:2:1', says: /key in double quotes/ },
  { name: 'comma before the end of a list', text: '{"a": [1,]}', where: 'spec:1:10' },
  { name: 'no comma', text: '{"a": 1\n"b": 2}', where: 'spec:2:1', says: /comma/ },
  { name: 'no comma in a list', text: '{"a": [1 2]}', where: 'spec:1:10', says: /comma/ },
  { name: 'no colon', text: '{"a" 1}', where: 'spec:1:6', says: /colon/ },
  { name: 'single quotes', text: "{'a': 1}", where: 'spec:1:2', says: /double quotes/ },
  { name: 'bare key', text: '{name: "a"}', where: 'spec:1:2', says: /double quotes/ },
  { name: 'comment', text: '// a spec\n{}', where: 'spec:1:1' },
  { name: 'two values', text: '{} {}', where: 'spec:1:4', says: /end of the text/ },
  { name: 'leading zero', text: '{"a": 012}', where: 'spec:1:7', says: /number/ },
  { name: 'leading plus', text: '{"a": +1}', where: 'spec:1:7', says: /number/ },
  { name: 'leading point', text: '{"a": .5}', where: 'spec:1:7', says: /number/ },
  { name: 'trailing point', text: '{"a": 5.}', where: 'spec:1:7', says: /number/ },
  { name: 'hexadecimal', text: '{"a": 0x10}', where: 'spec:1:7', says: /number/ },
  { name: 'unit in the value', text: '{"a": 12mm}', where: 'spec:1:7', says: /number/ },
  { name: 'a binary file', text: '\u0000\u0001\u0002', where: 'spec:1:1' },
  { name: 'an XML file', text: '<spec/>', where: 'spec:1:1' },
  { name: 'lists without end', text: '['.repeat(50_000), where: /^spec:1:\d+$/, says: /deep/ },
  { name: 'objects without end', text: '{"a":'.repeat(50_000), where: /^spec:1:\d+$/, says: /deep/ },
  edited('NaN', 'spec:12:7', '12,', 'NaN,', /NaN/),
  edited('Infinity', 'spec:12:7', '12,', 'Infinity,', /Infinity/),
  edited('minus Infinity', 'spec:12:7', '12,', '-Infinity,', /Infinity/),
  edited('undefined', /^spec:\d+:\d+$/, '"quick"', 'undefined', /undefined/),
  edited('capital True', /^spec:\d+:\d+$/, '"quick"', 'True', /True/),
];

/** Values of the wrong kind altogether. */
export const WRONG_WHOLE: BrokenSpec[] = [
  { name: 'a list', text: '[]', where: 'spec', says: /object/ },
  { name: 'a number', text: '3', where: 'spec', says: /got 3/ },
  { name: 'a word', text: '"gel"', where: 'spec', says: /got "gel"/ },
  { name: 'null', text: 'null', where: 'spec', says: /got null/ },
  { name: 'nothing in it', text: '{}', where: 'tissue', says: /nothing/ },
  { name: 'no trees either', text: '{}', where: 'trees', says: /nothing/ },
  { name: 'a key twice', text: '{"seed": 1, "seed": 2}', where: 'seed', says: /twice/ },
  edited('an inner key twice', 'tissue.shape', '"shape": "box"', '"shape": "box", "shape": "sphere"', /twice/),
  { name: 'a prototype key', text: '{"__proto__": {"tissue": 1}}', where: '__proto__', says: /unknown key/ },
  bent('strange key', '["a key with spaces"]', (spec) => Object.assign(spec, { 'a key with spaces': 1 })),
  bent('very long key', /^\["kkk/, (spec) => Object.assign(spec, { ['k'.repeat(100_000)]: 1 })),
];

/** Names, words and seeds. */
export const WRONG_WORDS: BrokenSpec[] = [
  bent(
    'misspelt tissue',
    'tisue',
    (spec) => {
      spec.tisue = spec.tissue;
      delete spec.tissue;
    },
    /nearest is tissue/,
  ),
  bent('misspelt seed', 'sed', (spec) => Object.assign(spec, { sed: 1 }), /nearest is seed/),
  bent('misspelt clearance', 'clearence', (spec) => Object.assign(spec, { clearence: {} }), /nearest is clearance/),
  bent('name a number', 'name', (spec) => Object.assign(spec, { name: 7 }), /got 7/),
  bent('name empty', 'name', (spec) => Object.assign(spec, { name: '' })),
  bent('name of two lines', 'name', (spec) => Object.assign(spec, { name: 'a\nb' })),
  bent('name without end', 'name', (spec) => Object.assign(spec, { name: 'n'.repeat(5000) }), /200/),
  bent('purpose a list', 'purpose', (spec) => Object.assign(spec, { purpose: ['a'] })),
  bent('seed null', 'seed', (spec) => Object.assign(spec, { seed: null }), /got null/),
  bent('seed a list', 'seed', (spec) => Object.assign(spec, { seed: [1] })),
  edited('seed too huge', 'seed', '"sound-1"', '1e999', /Infinity/),
  bent('seed empty', 'seed', (spec) => Object.assign(spec, { seed: '' })),
  bent('format of the future', 'format', (spec) => Object.assign(spec, { format: 99 }), /expected 1/),
  bent('refine a strange word', 'refine', (spec) => Object.assign(spec, { refine: 'hard' }), /thorough/),
  bent('refine negative', 'refine', (spec) => Object.assign(spec, { refine: -1 })),
  bent('refine half a sweep', 'refine', (spec) => Object.assign(spec, { refine: 1.5 })),
  bent('refine too many', 'refine', (spec) => Object.assign(spec, { refine: 10_001 }), /10000/),
];
