"""Prints as JSON what VTK, meshio and lib3mf find in the files of a mesh folder in every format, against lumen.vtp."""
import ctypes
import json
import sys

import meshio
import numpy
import vtkmodules.vtkCommonDataModel
import vtkmodules.vtkIOXML
from vtkmodules.util.numpy_support import vtk_to_numpy
from vtkmodules.vtkFiltersCore import vtkFeatureEdges, vtkMassProperties
from vtkmodules.vtkIOGeometry import vtkGLTFReader, vtkOBJReader
from vtkmodules.vtkIOPLY import vtkPLYReader

folder = sys.argv[1]
# Metres in one unit of the files that are written in the unit of the mesh.
unit = float(sys.argv[2])


def read(reader, name):
    reader.SetFileName(folder + "/" + name)
    reader.Update()
    return reader.GetOutput()


def triangles(data):
    """Corners of the triangles of a VTK data set, (f, 3, 3), in the file's order."""
    cells = data.GetCells() if data.IsA("vtkUnstructuredGrid") else data.GetPolys()
    rows = vtk_to_numpy(cells.GetConnectivityArray()).reshape(-1, 3)
    return vtk_to_numpy(data.GetPoints().GetData())[rows]


def ordered(corners):
    """The same triangles in an order that depends on their corners alone, float32."""
    flat = corners.reshape(-1, 9).astype(numpy.float32)
    return flat[numpy.lexsort(flat.T[::-1])]


def same(one, other):
    return bool(numpy.array_equal(ordered(one), ordered(other)))


def figures(data):
    """Edges that are not shared by exactly two triangles, and the volume."""
    finder = vtkFeatureEdges()
    finder.SetInputData(data)
    finder.BoundaryEdgesOn()
    finder.NonManifoldEdgesOn()
    finder.FeatureEdgesOff()
    finder.ManifoldEdgesOff()
    finder.Update()
    mass = vtkMassProperties()
    mass.SetInputData(data)
    mass.Update()
    return {"open": finder.GetOutput().GetNumberOfCells(), "volume": mass.GetVolume() * unit**3}


def ranges(data, names):
    return {name: list(data.GetArray(name).GetRange()) for name in names}


vtp = read(vtkmodules.vtkIOXML.vtkXMLPolyDataReader(), "lumen.vtp")
reference = triangles(vtp)
found = {"vtp": {"cells": len(reference)}}

ply = read(vtkPLYReader(), "lumen.ply")
found["ply"] = {"same": same(triangles(ply), reference), "points": ply.GetNumberOfPoints(), **figures(ply)}

obj = read(vtkOBJReader(), "lumen.obj")
obj_again = meshio.read(folder + "/lumen.obj")
found["obj"] = {
    "same": same(triangles(obj), reference),
    "points": obj.GetNumberOfPoints(),
    "groups": [len(block.data) for block in obj_again.cells],
    "meshio": same(numpy.concatenate([obj_again.points[block.data] for block in obj_again.cells]), reference),
    **figures(obj),
}

vtu = read(vtkmodules.vtkIOXML.vtkXMLUnstructuredGridReader(), "lumen.vtu")
vtu_again = meshio.read(folder + "/lumen.vtu")
found["vtu"] = {
    "same": bool(numpy.array_equal(triangles(vtu), reference)),
    "meshio": bool(numpy.array_equal(vtu_again.points[vtu_again.cells[0].data], reference)),
    "meshioPressure": bool(
        numpy.array_equal(
            vtu_again.point_data["pressure_Pa"], vtk_to_numpy(vtp.GetPointData().GetArray("pressure_Pa"))
        )
    ),
    "names": bytes(vtu_again.field_data["patch_names"]).decode().split("\0")[:-1],
    "arrays": ranges(vtu.GetPointData(), ["pressure_Pa", "wall_shear_Pa"])
    == ranges(vtp.GetPointData(), ["pressure_Pa", "wall_shear_Pa"])
    and ranges(vtu.GetCellData(), ["patch_number", "vessel"]) == ranges(vtp.GetCellData(), ["patch_number", "vessel"]),
}


def glb(name):
    blocks = read(vtkGLTFReader(), name)
    parts = []
    colours = []
    walk = blocks.NewIterator()
    walk.InitTraversal()
    while not walk.IsDoneWithTraversal():
        part = walk.GetCurrentDataObject()
        parts.append(triangles(part))
        colour = part.GetPointData().GetArray("COLOR_0")
        if colour is not None:
            colours.append(vtk_to_numpy(colour))
        walk.GoToNextItem()
    return parts, colours


parts, colours = glb("lumen.glb")
found["glb"] = {
    "same": same(numpy.concatenate(parts), reference * unit),
    "parts": [len(part) for part in parts],
    "colours": len(colours),
}
_, colours = glb("pressure.glb")
found["glb"]["byPressure"] = sum(len(colour) for colour in colours)

msh = meshio.read(folder + "/lumen_4.msh")
found["msh4"] = {
    "same": same(numpy.concatenate([msh.points[block.data] for block in msh.cells]), reference),
    "points": len(msh.points),
    "cells": [len(block.data) for block in msh.cells],
    "names": {name: int(tag[0]) for name, tag in msh.field_data.items()},
    "tags": [sorted({int(tag) for tag in block}) for block in msh.cell_data["gmsh:physical"]],
}


def three_mf(path):
    """What lib3mf, the reader of the standard's own consortium, finds when it is told to be strict; null without it."""
    try:
        lib = ctypes.CDLL("lib3MF.so.1")
    except OSError:
        return None

    def call(name, *words):
        code = getattr(lib, "lib3mf_" + name)(*words)
        if code != 0:
            raise RuntimeError(f"lib3mf_{name}: {code & 0xFFFFFFFF:#x}")

    def number(name, *words):
        value = ctypes.c_uint32()
        call(name, *words, ctypes.byref(value))
        return value.value

    def handle(name, *words):
        value = ctypes.c_void_p()
        call(name, *words, ctypes.byref(value))
        return value

    model = handle("createmodel")
    reader = handle("model_queryreader", model, b"3mf")
    call("reader_setstrictmodeactive", reader, ctypes.c_bool(True))
    try:
        call("reader_readfromfileutf8", reader, path.encode())
    except RuntimeError as error:
        return {"error": str(error)}
    objects = []
    walk = handle("model_getmeshobjects", model)
    while number("resourceiterator_movenext", walk) & 0xFF:
        mesh = handle("resourceiterator_getcurrent", walk)
        vertices = number("meshobject_getvertexcount", mesh)
        faces = number("meshobject_gettrianglecount", mesh)
        points = numpy.zeros((vertices, 3), numpy.float32)
        rows = numpy.zeros((faces, 3), numpy.uint32)
        number("meshobject_getvertices", mesh, points.ctypes.data_as(ctypes.c_void_p), vertices)
        number("meshobject_gettriangleindices", mesh, rows.ctypes.data_as(ctypes.c_void_p), faces)
        objects.append(
            {
                "points": vertices,
                "cells": faces,
                "closed": bool(number("meshobject_ismanifoldandoriented", mesh) & 0xFF),
                "corners": points[rows],
            }
        )
    return {
        "warnings": number("reader_getwarningcount", reader),
        # 0: micrometres, 1: millimetres, …, 5: metres.
        "unit": number("model_getunit", model),
        "metadata": number("model_getmetadatacount", model),
        "objects": objects,
    }


printed = three_mf(folder + "/lumen.3mf")
if printed is not None and "objects" in printed:
    metre = {0: 1e-6, 1: 1e-3}[printed["unit"]]
    for one in printed["objects"]:
        corners = one.pop("corners").astype(float) * metre
        span = numpy.abs(reference * unit).max()
        # Order is kept; numbers are float32.
        one["off"] = float(numpy.abs(corners - reference * unit).max() / span)
found["3mf"] = printed
found["3mfBroken"] = three_mf(folder + "/lumen.ply")

print(json.dumps(found))
