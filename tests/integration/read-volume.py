"""Prints as JSON what VTK and meshio find in lumen_volume.vtu and lumen_volume.msh."""
import json
import sys

import meshio
import numpy
import vtkmodules.vtkIOXML
from vtkmodules.util.numpy_support import vtk_to_numpy
from vtkmodules.vtkFiltersVerdict import vtkCellSizeFilter, vtkMeshQuality

folder = sys.argv[1]
reader = vtkmodules.vtkIOXML.vtkXMLUnstructuredGridReader()
reader.SetFileName(folder + "/lumen_volume.vtu")
reader.Update()
grid = reader.GetOutput()
types = vtk_to_numpy(grid.GetCellTypesArray())
sizes = vtkCellSizeFilter()
sizes.SetInputData(grid)
sizes.Update()
volume = vtk_to_numpy(sizes.GetOutput().GetCellData().GetArray("Volume"))
quality = vtkMeshQuality()
quality.SetInputData(grid)
quality.SetTetQualityMeasureToScaledJacobian()
quality.Update()
jacobian = vtk_to_numpy(quality.GetOutput().GetCellData().GetArray("Quality"))
velocity = vtk_to_numpy(grid.GetPointData().GetArray("velocity_m_s"))
other = meshio.read(folder + "/lumen_volume.msh")
print(
    json.dumps(
        {
            "cells": grid.GetNumberOfCells(),
            "points": grid.GetNumberOfPoints(),
            "leastVolume": [float(volume[types == kind].min()) for kind in (10, 13, 14) if (types == kind).any()],
            "volume": float(volume.sum()),
            "leastTetrahedron": float(jacobian[types == 10].min()),
            "velocity": list(velocity.shape),
            "fastest": float(numpy.linalg.norm(velocity, axis=1).max()),
            "msh": {block.type: len(block.data) for block in other.cells},
            "mshPoints": len(other.points),
            "names": sorted(other.field_data),
        }
    )
)
