"""Prints as JSON what VTK and meshio find in the files of a mesh folder."""
import json
import sys

import meshio
import numpy
import vtkmodules.vtkIOXML
from vtkmodules.vtkFiltersCore import vtkFeatureEdges, vtkMassProperties
from vtkmodules.vtkIOGeometry import vtkSTLReader

folder = sys.argv[1]


def edges(data):
    """Edges that are not shared by exactly two triangles."""
    finder = vtkFeatureEdges()
    finder.SetInputData(data)
    finder.BoundaryEdgesOn()
    finder.NonManifoldEdgesOn()
    finder.FeatureEdgesOff()
    finder.ManifoldEdgesOff()
    finder.Update()
    return finder.GetOutput().GetNumberOfCells()


def volume(data):
    mass = vtkMassProperties()
    mass.SetInputData(data)
    mass.Update()
    return mass.GetVolume()


reader = vtkmodules.vtkIOXML.vtkXMLPolyDataReader()
reader.SetFileName(folder + "/lumen.vtp")
reader.Update()
vtp = reader.GetOutput()
cells = vtp.GetCellData()
points = vtp.GetPointData()
patch = cells.GetAbstractArray("patch")
vessel = cells.GetArray("vessel")
pressure = points.GetArray("pressure_Pa")
shear = points.GetArray("wall_shear_Pa")
unit = vtp.GetFieldData().GetAbstractArray("length_unit")

one = vtkSTLReader()
one.SetFileName(folder + "/lumen_one_solid.stl")
one.Update()

msh = meshio.read(folder + "/lumen.msh")
stl = meshio.read(folder + "/lumen_one_solid.stl")

print(json.dumps({
    "vtp": {
        "points": vtp.GetNumberOfPoints(),
        "cells": vtp.GetNumberOfCells(),
        "patches": sorted({patch.GetValue(i) for i in range(patch.GetNumberOfValues())}),
        "vessels": list(vessel.GetRange()),
        "pressure": list(pressure.GetRange()),
        "shear": list(shear.GetRange()),
        "unit": unit.GetValue(0),
        "open": edges(vtp),
        "volume": volume(vtp),
    },
    "stl": {
        "points": one.GetOutput().GetNumberOfPoints(),
        "cells": one.GetOutput().GetNumberOfCells(),
        "meshioCells": int(sum(len(block.data) for block in stl.cells)),
    },
    "msh": {
        "points": len(msh.points),
        "cells": int(sum(len(block.data) for block in msh.cells)),
        "names": {name: int(tag[0]) for name, tag in msh.field_data.items()},
        "tags": sorted({int(tag) for block in msh.cell_data["gmsh:physical"] for tag in block}),
        "low": numpy.min(msh.points, axis=0).tolist(),
        "high": numpy.max(msh.points, axis=0).tolist(),
    },
}))
