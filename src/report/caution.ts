/** Stands in every report, in the README and in the viewer. */
export const CAUTION =
  'For research and engineering, not for diagnosis or treatment. The trees are synthetic and describe no patient. ' +
  'Constructs that will carry blood or cells are to be checked by the people licensed to do so, under the codes that ' +
  'apply where they work.';
