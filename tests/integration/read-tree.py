"""Opens one tree in all its formats with readers that know nothing of this project, and prints what they found as JSON.

VTK reads tree.vtp and tree.vtu, meshio reads tree.vtu, Python's own csv and json read the tables, and a parser of a few
lines reads tree.swc as its standard has it.

read-tree.py <folder with tree.vtp, tree.vtu, tree.nodes.csv, tree.vessels.csv, tree.json, tree.swc and named-*.vtu>
"""
import csv
import importlib
import json
import math
import os
import sys

PACKAGES = {"numpy": "python3-numpy", "vtk": "python3-vtk9", "meshio": "python3-meshio"}


def load_modules():
    missing = []
    for name in PACKAGES:
        try:
            globals()[name] = importlib.import_module(name)
        except ImportError as error:
            missing.append(f"no python module {name} ({error}): install the Debian package {PACKAGES[name]}")
    if missing:
        sys.exit("\n".join(missing))


def describe(values):
    """What is compared of a column: enough to see a wrong unit, a wrong type, a shift by a row or a swapped column."""
    values = [value.item() if hasattr(value, "item") else value for value in values]
    return {"count": len(values), "min": min(values), "max": max(values), "first": values[0], "last": values[-1]}


def describe_points(points):
    return {axis: describe([point[k] for point in points]) for k, axis in enumerate("xyz")}


def total_length(points, lines):
    return math.fsum(math.dist(points[a], points[b]) for a, b in lines)


def split_texts(codes):
    return bytes(int(code) for code in codes).decode("utf-8").split("\0")[:-1]


def read_with_vtk(reader, path):
    from vtk.util.numpy_support import vtk_to_numpy

    errors = []
    for event in ("ErrorEvent", "WarningEvent"):
        reader.AddObserver(event, lambda _, name: errors.append(name))
    reader.SetFileName(path)
    reader.Update()
    data = reader.GetOutput()
    points = vtk_to_numpy(data.GetPoints().GetData())
    lines = []
    types = {}
    for i in range(data.GetNumberOfCells()):
        cell = data.GetCell(i)
        kind = f"{cell.GetClassName()} of {cell.GetNumberOfPoints()}"
        types[kind] = types.get(kind, 0) + 1
        lines.append((cell.GetPointId(0), cell.GetPointId(cell.GetNumberOfPoints() - 1)))
    sections = {}
    for section, arrays in (("cellData", data.GetCellData()), ("pointData", data.GetPointData())):
        sections[section] = {
            arrays.GetArrayName(i): {
                "type": arrays.GetArray(i).GetDataTypeAsString(),
                **describe(vtk_to_numpy(arrays.GetArray(i))),
            }
            for i in range(arrays.GetNumberOfArrays())
        }
    field = {}
    for i in range(data.GetFieldData().GetNumberOfArrays()):
        array = data.GetFieldData().GetAbstractArray(i)
        values = [array.GetValue(k) for k in range(array.GetNumberOfValues())]
        field[array.GetName()] = split_texts(values) if array.GetDataTypeAsString() == "unsigned char" else values
    return {
        "errors": errors,
        "points": data.GetNumberOfPoints(),
        "cells": data.GetNumberOfCells(),
        "cellTypes": types,
        "pointType": data.GetPoints().GetData().GetDataTypeAsString(),
        "position": describe_points(points),
        "length": total_length(points, lines),
        "fieldData": field,
        **sections,
    }


def read_with_meshio(path):
    mesh = meshio.read(path)
    return {
        "points": len(mesh.points),
        "cells": sum(len(block.data) for block in mesh.cells),
        "cellTypes": {block.type: list(block.data.shape) for block in mesh.cells},
        "pointType": str(mesh.points.dtype),
        "position": describe_points(mesh.points),
        "length": total_length(mesh.points, [line for block in mesh.cells for line in block.data]),
        "cellData": {
            name: {"type": str(blocks[0].dtype), **describe(blocks[0])} for name, blocks in mesh.cell_data.items()
        },
        "pointData": {
            name: {"type": str(values.dtype), **describe(values)} for name, values in mesh.point_data.items()
        },
        "fieldData": {
            name: split_texts(values) if values.dtype == numpy.uint8 else values.tolist()
            for name, values in mesh.field_data.items()
        },
    }


def read_swc(path):
    """Source: INCF swc-specification: id type x y z radius parent, micrometres, parents first, -1 for none."""
    samples = {}
    with open(path, encoding="ascii") as file:
        for line in file:
            if line.strip() == "" or line.startswith("#"):
                continue
            number, kind, x, y, z, radius, parent = line.split()
            if int(parent) != -1 and int(parent) not in samples:
                raise ValueError(f"sample {number} comes before its parent {parent}")
            samples[int(number)] = (int(kind), (float(x), float(y), float(z)), float(radius), int(parent))
    places = {number: place for number, (_, place, _, _) in samples.items()}
    lines = [(parent, number) for number, (_, _, _, parent) in samples.items() if parent != -1]
    return {
        "points": len(samples),
        "cells": len(lines),
        "types": sorted({kind for kind, _, _, _ in samples.values()}),
        "position": describe_points(list(places.values())),
        "length": total_length(places, lines),
        "radius": describe([samples[number][2] for _, number in lines]),
    }


def read_csv(path):
    with open(path, encoding="utf-8", newline="") as file:
        rows = list(csv.DictReader(file))
    return {
        name: sorted({row[name] for row in rows})
        if name in ("tree_name", "kind")
        else describe([float(row[name]) for row in rows])
        for name in rows[0]
    }


def read_json(path):
    with open(path, encoding="utf-8") as file:
        whole = json.load(file)
    return {
        "trees": whole["trees"],
        "provenance": whole["provenance"],
        "nodes": {name: describe(values) for name, values in whole["nodes"].items()},
        "vessels": {name: describe(values) for name, values in whole["vessels"].items()},
    }


def main(folder):
    load_modules()
    path = lambda name: os.path.join(folder, name)
    found = {
        "versions": {"vtk": vtk.vtkVersion().GetVTKVersion(), "meshio": meshio.__version__},
        "vtkOfVtp": read_with_vtk(vtk.vtkXMLPolyDataReader(), path("tree.vtp")),
        "vtkOfVtu": read_with_vtk(vtk.vtkXMLUnstructuredGridReader(), path("tree.vtu")),
        "meshioOfVtu": read_with_meshio(path("tree.vtu")),
        "meshioOfNamed": [
            read_with_meshio(path(name)) for name in sorted(os.listdir(folder)) if name.startswith("named-")
        ],
        "swc": read_swc(path("tree.swc")),
        "nodesCsv": read_csv(path("tree.nodes.csv")),
        "vesselsCsv": read_csv(path("tree.vessels.csv")),
        "json": read_json(path("tree.json")),
    }
    json.dump(found, sys.stdout, indent=1)
    print()


if __name__ == "__main__":
    main(sys.argv[1])
