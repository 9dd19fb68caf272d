"""Solves Stokes flow in a mesh folder's lumen and compares it with the folder's networks; prints one JSON line.

    /usr/bin/python3 tests/integration/judge-flow.py <mesh folder>

Independent of the code that made the folder: TetGen fills lumen_one_solid.stl as it is, Taylor-Hood elements (P2-P1) on its
tetrahedra, natural pressure at the caps, one factorisation, one solve a cap: the conductance matrix between all caps.
Debian's packages: python3-dolfin, tetgen. The first run compiles its forms for a minute.
"""
import csv
import json
import os
import resource
import subprocess
import sys
import tempfile
import time

os.environ.setdefault('OMP_NUM_THREADS', '1')
import dolfin as df
import numpy as np
from petsc4py import PETSc

df.set_log_level(40)
df.parameters['form_compiler']['quadrature_degree'] = 4


def read_table(path):
    with open(path, newline='') as file:
        return list(csv.DictReader(file))


def numbers(row, *keys):
    return np.array([float(row[key]) for key in keys])


def fill(stl):
    """Tetrahedra of a closed surface, every triangle of it kept."""
    with tempfile.TemporaryDirectory() as folder:
        path = os.path.join(folder, 'lumen.stl')
        os.symlink(os.path.abspath(stl), path)
        subprocess.run(['tetgen', '-pYq1.4Q', path], capture_output=True, check=True)

        def rows(name):
            with open(os.path.join(folder, 'lumen.1.' + name)) as file:
                count = int(file.readline().split()[0])
                return np.array([file.readline().split() for _ in range(count)], dtype=float)

        node = rows('node')
        return node[:, 1:4], rows('ele')[:, 1:5].astype(int) - int(node[0, 0])


def conductances(folder, caps, unit):
    """(k, k) m3: flow into the lumen at cap i times the viscosity, for a pressure of 1 at cap j."""
    places, cells = fill(os.path.join(folder, 'lumen_one_solid.stl'))
    places = places * unit
    scale = max(float(cap['radius_m']) for cap in caps)
    mesh = df.Mesh()
    editor = df.MeshEditor()
    editor.open(mesh, 'tetrahedron', 3, 3)
    editor.init_vertices(len(places))
    editor.init_cells(len(cells))
    for k, place in enumerate(places / scale):
        editor.add_vertex(k, place)
    for k, cell in enumerate(cells):
        editor.add_cell(k, cell)
    editor.close()
    mesh.init(2, 3)

    centre = np.array([numbers(cap, 'cx', 'cy', 'cz') for cap in caps]) / scale
    normal = np.array([numbers(cap, 'nx', 'ny', 'nz') for cap in caps])
    radius = np.array([float(cap['radius_m']) for cap in caps]) / scale
    marks = df.MeshFunction('size_t', mesh, 2, 0)
    corners = mesh.coordinates()
    for facet in df.facets(mesh):
        if not facet.exterior():
            continue
        off = corners[facet.entities(0)][None] - centre[:, None]
        flat = np.abs(np.einsum('cij,cj->ci', off, normal)).max(1) < 1e-4 * radius
        near = np.linalg.norm(off, axis=2).max(1) < 1.1 * radius
        on = np.nonzero(flat & near)[0]
        marks[facet] = 2 + on[0] if len(on) > 0 else 1

    space = df.FunctionSpace(
        mesh, df.VectorElement('P', mesh.ufl_cell(), 2) * df.FiniteElement('P', mesh.ufl_cell(), 1)
    )
    u, p = df.TrialFunctions(space)
    v, q = df.TestFunctions(space)
    # With gradients, not their symmetric part, developed flow leaves through a cap as it is.
    form = (df.inner(df.grad(u), df.grad(v)) - p * df.div(v) - q * df.div(u)) * df.dx
    wall = df.DirichletBC(space.sub(0), df.Constant((0, 0, 0)), marks, 1)
    matrix, zero = df.PETScMatrix(), df.PETScVector()
    df.assemble_system(form, df.Constant(0.0) * q * df.dx, wall, A_tensor=matrix, b_tensor=zero)
    ds = df.Measure('ds', domain=mesh, subdomain_data=marks)
    flux = [df.assemble(df.dot(v, df.FacetNormal(mesh)) * ds(2 + k)) for k in range(len(caps))]
    area = [df.assemble(df.Constant(1.0) * ds(2 + k)) / (np.pi * radius[k] ** 2) for k in range(len(caps))]
    if max(abs(a - 1) for a in area) > 0.02:
        raise SystemExit(f'caps not found: areas over those of circles are {area}')

    # Half the memory of an LU; it fails now and then (pivots), which the sums below tell.
    for kind in ('cholesky', 'lu'):
        solver = PETSc.KSP().create()
        if kind == 'cholesky':
            matrix.mat().setOption(PETSc.Mat.Option.SYMMETRIC, True)
        solver.setOperators(matrix.mat())
        solver.setType('preonly')
        solver.getPC().setType(kind)
        solver.getPC().setFactorSolverType('mumps')
        solver.getPC().setFactorSetUpSolverType()
        solver.getPC().getFactorMatrix().setMumpsIcntl(14, 60)
        solver.getPC().getFactorMatrix().setMumpsIcntl(7, 5)
        solver.setUp()
        out = np.zeros((len(caps), len(caps)))
        for j in range(len(caps)):
            load = flux[j].copy() * -1.0
            wall.apply(load)
            flow = df.Function(space)
            solver.solve(df.as_backend_type(load).vec(), df.as_backend_type(flow.vector()).vec())
            for i in range(len(caps)):
                out[i, j] = -flux[i].inner(flow.vector())
        solver.destroy()
        lost = np.abs(out.sum(1)).max() / np.abs(out).max()
        skew = np.abs(out - out.T).max() / np.abs(out).max()
        if np.isfinite(lost) and max(lost, skew) < 1e-8:
            return out * scale**3, space.dim(), len(cells)
    raise SystemExit(f'the solution does not conserve flow: {lost} lost, {skew} skew')


def network_matrix(network, lengths, viscosity, nodes):
    """(k, k) m3/(Pa s): flow into a network of tubes at cap i, for a pressure of 1 at cap j."""
    place = {name: k for k, name in enumerate(sorted({row[end] for row in network for end in ('from', 'to')}))}
    full = np.zeros((len(place), len(place)))
    for row, length in zip(network, lengths):
        conductance = np.pi * float(row['r0_m']) ** 4 / (8 * viscosity * length)
        a, b = place[row['from']], place[row['to']]
        full[[a, b], [a, b]] += conductance
        full[[a, b], [b, a]] -= conductance
    outer = [place[node] for node in nodes]
    inner = [k for k in range(len(place)) if k not in outer]
    coupling = full[np.ix_(outer, inner)]
    return full[np.ix_(outer, outer)] - coupling @ np.linalg.solve(full[np.ix_(inner, inner)], coupling.T)


def main(folder):
    start = time.time()
    with open(os.path.join(folder, 'mesh.json')) as file:
        notes = json.load(file)
    caps = read_table(os.path.join(folder, 'boundary.csv'))
    network = read_table(os.path.join(folder, 'network.csv'))
    viscosity = notes['viscosity_Pa_s']
    unit = {'m': 1, 'mm': 1e-3, 'um': 1e-6}[notes['unit']]
    flow_matrix, unknowns, cells = conductances(folder, caps, unit)
    flow_matrix /= viscosity

    ends = [(row[end], numbers(row, 'x' + k, 'y' + k, 'z' + k)) for row in network for end, k in (('from', '0'), ('to', '1'))]
    nodes = [
        min(ends, key=lambda end: np.linalg.norm(end[1] - numbers(cap, 'cx', 'cy', 'cz')))[0] for cap in caps
    ]
    root = next(k for k, cap in enumerate(caps) if cap['resistance_Pa_s_m3'] == '')
    others = [k for k in range(len(caps)) if k != root]
    into = np.array([float(cap['flow_m3_s']) * (1 if cap['type'] == 'inlet' else -1) for cap in caps])

    def pressures(matrix):
        return np.linalg.lstsq(matrix, into, rcond=None)[0]

    def drops(matrix):
        pressure = pressures(matrix)
        return np.abs(pressure[root] - pressure[others])

    def shares(matrix, pressure):
        flow = matrix @ pressure
        return -flow[others] / flow[root]

    judged = drops(flow_matrix)
    result = {
        'unknowns': unknowns,
        'tetrahedra': cells,
        'triangles': notes['counts']['triangles'],
        'patches': [caps[k]['patch'] for k in others],
        'reynolds': max(float(cap['reynolds']) for cap in caps),
        'stated_lengths': notes['network']['lengths'],
        'drop_Pa': judged.tolist(),
    }
    stated = np.array([float(caps[k]['pressure_Pa']) for k in range(len(caps))])
    result['stated'] = (np.abs(stated[root] - stated[others]) / judged - 1).tolist()
    for name, column in (('effective', 'effective_length_m'), ('axis', 'length_m')):
        matrix = network_matrix(network, [float(row[column]) for row in network], viscosity, nodes)
        told = np.array([float(caps[k][f'drop_{name}_Pa']) for k in others])
        # The table's drops are those of its network, to rounding.
        assert np.allclose(drops(matrix), told, rtol=1e-6), (drops(matrix), told)
        pressure = pressures(matrix)
        result[name] = {
            # Drops for the table's flows, network over Stokes; shares of the root's flow for the network's pressures.
            'drop': (told / judged - 1).tolist(),
            'share': (shares(flow_matrix, pressure) / shares(matrix, pressure) - 1).tolist(),
        }
    result['seconds'] = round(time.time() - start, 1)
    result['memory_GB'] = round(resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1e6, 2)
    print(json.dumps(result))


main(sys.argv[1])
