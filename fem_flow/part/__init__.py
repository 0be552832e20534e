"""From a part script to a curved mesh with named boundaries.

A script is loaded, drawn and meshed by gmsh in a process of its own (``worker``, steered by ``drawing.Drawing``), and only
plain arrays come back: an ``Outline`` and a ``MeshData``, both in metres. Nothing in this room but the worker's side
imports gmsh.
"""
