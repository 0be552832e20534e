"""The one place that opens and closes gmsh, with every option that the meshes rely on set explicitly."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager

from fem_flow.errors import GeometryError

OPTIONS = {
    "General.Terminal": 0,
    "General.NumThreads": 1,
    "General.AbortOnError": 2,
    "Geometry.AutoCoherence": 1,
    "Geometry.Tolerance": 1e-8,
    "Geometry.OCCAutoFix": 1,
    "Geometry.OCCTargetUnit": "",
    "Mesh.Algorithm": 6,
    "Mesh.AlgorithmSwitchOnFailure": 1,
    "Mesh.ElementOrder": 1,
    "Mesh.HighOrderOptimize": 0,
    "Mesh.MeshSizeExtendFromBoundary": 0,
    "Mesh.MeshSizeFromPoints": 0,
    "Mesh.MeshSizeFromCurvature": 0,
    "Mesh.MeshSizeFactor": 1.0,
    "Mesh.MeshSizeMin": 0.0,
    "Mesh.MeshSizeMax": 1e22,
    "Mesh.MinimumCirclePoints": 7,
    "Mesh.MinimumCurveNodes": 2,
    "Mesh.LcIntegrationPrecision": 1e-5,
    "Mesh.Smoothing": 2,
    "Mesh.RecombineAll": 0,
    "Mesh.RandomFactor": 1e-9,
    "Mesh.RandomSeed": 1,
    "Mesh.SaveAll": 0,
    "Mesh.Binary": 1,
    "Mesh.MshFileVersion": 4.1,
}

APT_PACKAGES = {
    "libGLU": "libglu1-mesa",
    "libGL": "libgl1",
    "libX11": "libx11-6",
    "libXcursor": "libxcursor1",
    "libXext": "libxext6",
    "libXfixes": "libxfixes3",
    "libXft": "libxft2",
    "libXinerama": "libxinerama1",
    "libXrender": "libxrender1",
    "libXi": "libxi6",
    "libSM": "libsm6",
    "libICE": "libice6",
    "libfontconfig": "libfontconfig1",
    "libfreetype": "libfreetype6",
    "libgomp": "libgomp1",
}


def import_gmsh():
    """Import gmsh, or say in one sentence what is missing.

    Raises
    ------
    GeometryError : reason ``"missing_library"``
    """
    try:
        import gmsh
    except (OSError, ImportError) as error:
        raise missing_library(error) from error
    return gmsh


def missing_library(error: Exception) -> GeometryError:
    """The sentence for a gmsh that cannot be loaded: which library, and how to install it."""
    words = str(error)
    library = next((w.rstrip(":,") for w in words.split() if ".so" in w), None)
    if library is None:
        return GeometryError(
            f"the mesh generator gmsh cannot be imported ({words}); install it with: pip install gmsh",
            reason="missing_library",
            details={"library": "gmsh"},
        )
    library = library.rsplit("/", 1)[-1]
    package = APT_PACKAGES.get(library.split(".so")[0])
    if package:
        remedy = f"install it with: sudo apt-get install {package}"
    else:
        remedy = "install the system package that contains it"
    return GeometryError(
        f"the mesh generator gmsh needs the system library {library}, which is not on this machine; {remedy}",
        reason="missing_library",
        details={"library": library, "package": package},
    )


def set_options(gmsh) -> None:
    """Set every option the meshes depend on; called before each mesh, for a script may have changed them."""
    for name, value in OPTIONS.items():
        if isinstance(value, str):
            gmsh.option.setString(name, value)
        else:
            gmsh.option.setNumber(name, value)


@contextmanager
def session() -> Iterator:
    """A fresh gmsh with an empty current model; closed again whatever happens.

    Raises
    ------
    GeometryError : gmsh cannot be loaded (reason ``"missing_library"``)
    RuntimeError : gmsh is already open in this process
    """
    gmsh = import_gmsh()
    if gmsh.isInitialized():
        raise RuntimeError("gmsh is already open in this process; one session at a time")
    gmsh.initialize([], readConfigFiles=False, interruptible=False)
    try:
        set_options(gmsh)
        gmsh.model.add("part")
        yield gmsh
    finally:
        if gmsh.isInitialized():
            gmsh.finalize()
