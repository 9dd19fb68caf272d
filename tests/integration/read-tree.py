"""Opens a tree.vtp with readers that know nothing of this project and prints what they found as one JSON object.

VTK reads the file itself. meshio has no reader for PolyData, so VTK hands the same data on as an unstructured grid
(.vtu, through a temporary folder) and meshio reads that: it checks points, cells and arrays, not our bytes.

Run with a python3 that has vtk and meshio: read-tree.py <tree.vtp>
"""
import json
import os
import sys
import tempfile

import meshio
import vtk
from vtk.util.numpy_support import vtk_to_numpy


def describe(array):
    values = vtk_to_numpy(array)
    return {
        "type": array.GetDataTypeAsString(),
        "count": int(array.GetNumberOfTuples()),
        "min": float(values.min()),
        "max": float(values.max()),
    }


def main(path):
    errors = []
    reader = vtk.vtkXMLPolyDataReader()
    reader.AddObserver("ErrorEvent", lambda *_: errors.append("error"))
    reader.SetFileName(path)
    reader.Update()
    data = reader.GetOutput()
    found = {
        "vtk": vtk.vtkVersion().GetVTKVersion(),
        "errors": len(errors),
        "points": data.GetNumberOfPoints(),
        "lines": data.GetNumberOfLines(),
        "cells": data.GetNumberOfCells(),
        "bounds_m": list(data.GetBounds()),
        "pointType": data.GetPoints().GetData().GetDataTypeAsString(),
    }
    for section, arrays in (("cellData", data.GetCellData()), ("pointData", data.GetPointData())):
        found[section] = {
            arrays.GetArrayName(i): describe(arrays.GetArray(i)) for i in range(arrays.GetNumberOfArrays())
        }
    field = data.GetFieldData()
    found["fieldData"] = {}
    for i in range(field.GetNumberOfArrays()):
        array = field.GetAbstractArray(i)
        found["fieldData"][array.GetName()] = [
            str(array.GetValue(k)) for k in range(array.GetNumberOfValues())
        ]
    lengths = [data.GetCell(i).GetNumberOfPoints() for i in range(min(1000, data.GetNumberOfCells()))]
    found["pointsALine"] = sorted(set(lengths))
    append = vtk.vtkAppendFilter()
    append.AddInputData(data)
    append.Update()
    # meshio knows no arrays of text.
    append.GetOutput().GetFieldData().Initialize()
    with tempfile.TemporaryDirectory() as folder:
        grid = os.path.join(folder, "tree.vtu")
        writer = vtk.vtkXMLUnstructuredGridWriter()
        writer.SetFileName(grid)
        writer.SetInputData(append.GetOutput())
        writer.SetDataModeToBinary()
        writer.Write()
        mesh = meshio.read(grid)
    found["meshio"] = {
        "version": meshio.__version__,
        "points": len(mesh.points),
        "cells": {block.type: len(block.data) for block in mesh.cells},
        "cellData": sorted(mesh.cell_data),
        "pointData": sorted(mesh.point_data),
    }
    json.dump(found, sys.stdout, indent=1)
    print()
    return 0 if not errors else 1


if __name__ == "__main__":
    sys.exit(main(sys.argv[1]))
