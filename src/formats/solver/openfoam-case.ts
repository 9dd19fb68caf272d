import { encodeText } from '../../core/text.ts';
import { fromSi } from '../../core/units.ts';
import type { BoundaryRow } from '../../mesh/boundary-table.ts';
import type { InletProfile } from '../../mesh/inlet-profile.ts';
import type { NamedBytes } from '../format.ts';
import type { MeshUnit } from '../mesh/length-unit.ts';
import { printReal } from '../text/numbers.ts';
import { TextWriter } from '../text/writer.ts';

/** Folder of the case, and all that this program writes into it. */
export const CASE_FOLDER = 'openfoam';
export const CASE_FILES = [
  ...['run.sh', '0/U', '0/p', 'constant/transportProperties', 'constant/turbulenceProperties'],
  ...['system/controlDict', 'system/fvSchemes', 'system/fvSolution'],
] as const;
const STEPS = 1000;

export interface CaseInput {
  readonly boundary: readonly BoundaryRow[];
  /** kg/m³ */
  readonly density: number;
  /** Pa·s */
  readonly viscosity: number;
  /** Of the velocities at inlets: spread evenly, or that which develops behind the cap. Either carries the table's flow. */
  readonly profile: InletProfile;
  /** Unit of `lumen.msh`. */
  readonly unit: MeshUnit;
}

/**
 * A case for OpenFOAM that runs as it is: `sh run.sh` fills the surface, solves steady laminar flow with the table's
 * flows at inlets and pressures at outlets, and prints both beside what came out.
 *
 * The mesh is the polyhedral dual of Gmsh's tetrahedra: on the tetrahedra themselves finite volumes read 14 to 20 % high.
 * Pressures in it are over density, m²/s².
 *
 * Lab note: velocities of the parabola mapped onto the faces of the inlet carried 5.5 % too much at 16 segments; the profile
 * that develops behind the cap, scaled to the flow, carries just the flow.
 *
 * Source: OpenFOAM user guide (v1912): case layout, boundary conditions flowRateInletVelocity, pressureInletOutletVelocity,
 * function object surfaceFieldValue.
 */
export function encodeOpenfoamCase(input: CaseInput): NamedBytes[] {
  const { density, viscosity } = input;
  const files: NamedBytes[] = [];
  const add = (name: string, bytes: Uint8Array) => files.push({ name: `${CASE_FOLDER}/${name}`, bytes });
  add('run.sh', encodeText(runScript(input)));
  add('0/U', velocity(input));
  add('0/p', pressure(input));
  add(
    'constant/transportProperties',
    encodeText(
      `${head('dictionary', 'transportProperties')}transportModel Newtonian;\nnu ${printReal(viscosity / density)};\n`,
    ),
  );
  add(
    'constant/turbulenceProperties',
    encodeText(`${head('dictionary', 'turbulenceProperties')}simulationType laminar;\n`),
  );
  add('system/controlDict', controlDict(input.boundary));
  add('system/fvSchemes', encodeText(head('dictionary', 'fvSchemes') + SCHEMES));
  add('system/fvSolution', encodeText(head('dictionary', 'fvSolution') + SOLUTION));
  return files;
}

function head(type: string, object: string): string {
  return `FoamFile\n{\n    version 2.0;\n    format ascii;\n    class ${type};\n    object ${object};\n}\n`;
}

function velocity({ boundary, profile }: CaseInput): Uint8Array {
  const out = new TextWriter();
  out.add(`${head('volVectorField', 'U')}dimensions [0 1 -1 0 0 0 0];\ninternalField uniform (0 0 0);\n`);
  out.add('boundaryField\n{\n    wall { type noSlip; }\n');
  for (const { patch, type, flow } of boundary) {
    const condition =
      type === 'outlet'
        ? 'type pressureInletOutletVelocity; value uniform (0 0 0);'
        : `type flowRateInletVelocity; volumetricFlowRate constant ${printReal(flow)}; ` +
          `extrapolateProfile ${profile === 'parabolic' ? 'yes' : 'no'}; value uniform (0 0 0);`;
    out.add(`    ${patch} { ${condition} }\n`);
  }
  out.add('}\n');
  return out.bytes();
}

function pressure({ boundary, density }: CaseInput): Uint8Array {
  const out = new TextWriter();
  const mean = boundary.reduce((sum, row) => sum + row.pressure, 0) / (density * boundary.length);
  out.add(`${head('volScalarField', 'p')}dimensions [0 2 -2 0 0 0 0];\ninternalField uniform ${printReal(mean)};\n`);
  out.add('boundaryField\n{\n    wall { type zeroGradient; }\n');
  for (const row of boundary) {
    const condition =
      row.type === 'inlet'
        ? 'type zeroGradient;'
        : `type fixedValue; value uniform ${printReal(row.pressure / density)};`;
    out.add(`    ${row.patch} { ${condition} }\n`);
  }
  out.add('}\n');
  return out.bytes();
}

function controlDict(boundary: readonly BoundaryRow[]): Uint8Array {
  const out = new TextWriter();
  out.add(`${head('dictionary', 'controlDict')}application simpleFoam;
startFrom startTime;
startTime 0;
stopAt endTime;
endTime ${STEPS};
deltaT 1;
writeControl timeStep;
writeInterval ${STEPS};
purgeWrite 1;
writeFormat binary;
writePrecision 12;
functions
{
`);
  for (const { patch } of boundary) {
    for (const [field, operation] of [
      ['p', 'areaAverage'],
      ['phi', 'sum'],
    ]) {
      out.add(
        `    ${patch}_${field} { type surfaceFieldValue; libs ("libfieldFunctionObjects.so"); writeControl timeStep; ` +
          `writeInterval 1; writeFields no; log no; regionType patch; name ${patch}; operation ${operation}; ` +
          `fields (${field}); }\n`,
      );
    }
  }
  out.add('}\n');
  return out.bytes();
}

const SCHEMES = `ddtSchemes { default steadyState; }
gradSchemes { default cellLimited leastSquares 1; }
divSchemes
{
    default none;
    div(phi,U) bounded Gauss linearUpwind grad(U);
    div((nuEff*dev2(T(grad(U))))) Gauss linear;
}
laplacianSchemes { default Gauss linear corrected; }
interpolationSchemes { default linear; }
snGradSchemes { default corrected; }
`;

const SOLUTION = `solvers
{
    p { solver GAMG; smoother GaussSeidel; tolerance 1e-12; relTol 0.01; }
    U { solver smoothSolver; smoother symGaussSeidel; tolerance 1e-14; relTol 0.01; }
}
SIMPLE
{
    consistent yes;
    nNonOrthogonalCorrectors 1;
    residualControl { p 1e-5; U 1e-5; }
}
relaxationFactors { equations { U 0.9; } fields { p 1; } }
`;

function runScript({ density, unit }: CaseInput): string {
  const metre = fromSi(1, unit);
  const scale = `transformPoints -scale '(${1 / metre} ${1 / metre} ${1 / metre})' > log.scale 2>&1\n`;
  return `#!/bin/sh
# Fills the lumen beside this folder with Gmsh, turns the tetrahedra into polyhedra, solves steady laminar flow and prints
# what came out at each cap beside ../boundary.csv. Wants gmsh and OpenFOAM (v1912 was tried).
set -e
cd "$(dirname "$0")"
export WM_PROJECT_DIR="\${WM_PROJECT_DIR:-/usr/share/openfoam}"
(cd .. && gmsh -3 fill.geo -format msh2 -o openfoam/filled.msh) > log.gmsh 2>&1
gmshToFoam filled.msh > log.convert 2>&1
${unit === 'm' ? '' : scale}polyDualMesh 60 -overwrite -doNotPreserveFaceZones > log.dual 2>&1
checkMesh > log.check 2>&1
grep 'Mesh OK' log.check
simpleFoam > log.solve 2>&1
grep 'SIMPLE solution converged' log.solve
last() { tail -n 1 "postProcessing/$1/0/surfaceFieldValue.dat" | awk '{ print $2 }'; }
echo 'patch,flow_m3_s,solved_flow_m3_s,pressure_Pa,solved_pressure_Pa'
tail -n +2 ../boundary.csv | while IFS=, read -r patch type radius cx cy cz nx ny nz flow pressure rest; do
  echo "$patch $flow $(last "\${patch}_phi") $pressure $(last "\${patch}_p")" |
    awk '{ printf "%s,%.6g,%.6g,%.8g,%.8g\\n", $1, $2, ($3 < 0 ? -$3 : $3), $4, ${printReal(density)} * $5 }'
done
`;
}
