"""One drawn design in an open gmsh session: its outline, and its meshes at any size."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np

from fem_flow.case.declaration import Declaration
from fem_flow.errors import GeometryError
from fem_flow.part import sizing
from fem_flow.part.cad import read_cad
from fem_flow.part.extract import LEAST_JACOBIAN, BadElements, mesh_data
from fem_flow.part.gap import Facing
from fem_flow.part.mesh import MeshData, Outline
from fem_flow.part.names import watched_names
from fem_flow.part.outline import corner_list, narrowest_gap, outline_of, sharp_corners
from fem_flow.part.roles import with_roles
from fem_flow.part.script import Script, declaration, draw
from fem_flow.part.session import set_options

MOST_CELLS = 2_000_000
"""A mesh of more triangles than this is refused: nine million unknowns are out of reach of a direct solver."""
TRIES = 3
"""A mesh with bad elements is made again, finer around them, this many times."""


class Design:
    """A part drawn with given values.

    Parameters
    ----------
    gmsh : the module, with an open session and an empty model
    values : every parameter, lengths in the script's unit

    Raises
    ------
    GeometryError : the script failed, or its drawing or names are wrong
    """

    def __init__(self, gmsh, script: Script, values: Mapping):
        self.gmsh = gmsh
        self.declared: Declaration = declaration(script, values)
        with watched_names(gmsh):
            draw(script, values)
        if not gmsh.isInitialized():
            raise GeometryError(
                f"the script {script.path.name} closed gmsh; leave gmsh.initialize and gmsh.finalize to fem_flow",
                reason="script_failed",
            )
        self.cad = with_roles(read_cad(gmsh, self.declared, script.metres), self.declared)
        self.facing = Facing(self.cad)
        self.sharp = sharp_corners(self.facing)
        self.samples = [self.facing.sample(c) for c in self.cad.boundary if c.role == "wall"]
        self.gap = narrowest_gap(gmsh, self.cad, self.facing, self.samples, self.sharp)
        self.corners = corner_list(self.cad, self.sharp)
        self._fields: dict = {}

    def outline(self) -> Outline:
        """The outline in metres."""
        return outline_of(self.cad, self.corners, self.gap)

    def mesh(
        self,
        scale: float = 1.0,
        size: float | None = None,
        near_walls: float | None = None,
        max_cells: int | None = None,
        grade_at: Sequence[tuple[float, float]] = (),
    ) -> MeshData:
        """Mesh the design; see ``Drawing.mesh``."""
        metres = self.cad.metres
        size, near_walls = (None if v is None else v / metres for v in (size, near_walls))
        places = tuple((x / metres, y / metres) for x, y in grade_at)
        most = MOST_CELLS if max_cells is None else max_cells
        cones, field, triangles = self._field(size, near_walls, places, scale, most)
        self._refuse(triangles / scale**2, most, slack=1.5)
        repairs: list = []
        for _ in range(TRIES):
            self._generate(field, scale)
            try:
                mesh = mesh_data(self.gmsh, self.cad, self.corners, self.gap[0])
            except BadElements as bad:
                worst = bad
                repairs.append(_repair(cones, bad.places))
                field = sizing.build(self.cad, sizing.Cones.join([cones, *repairs]), size)
                continue
            self._refuse(len(mesh.cells), most)
            return mesh
        raise GeometryError(
            f"{len(worst.places)} mesh elements are folded or nearly so (scaled Jacobian {worst.worst:.2g}, allowed from"
            f" {LEAST_JACOBIAN}), the first at {self.cad.place(worst.places[0])}; look there for a sliver, a very short"
            " piece or walls that meet at a very small angle",
            reason="bad_elements",
            details={"worst": worst.worst, "at": (worst.places[0] * metres).tolist()},
        )

    def _field(self, size, near_walls, places, scale, most):
        """Cones, size field and number of triangles at scale 1; kept, for every scale uses the same."""
        key = (size, near_walls, places)
        if key not in self._fields:
            cones = sizing.wall_cones(self.cad, self.facing, self.samples, self.sharp, self.gap[0], size, near_walls, places)
            self._refuse(cones.least_triangles() / scale, most, slack=1.5, least="at least ")
            try:
                field = sizing.build(self.cad, cones, size)
            except sizing.TooFine:
                raise self._too_many("millions of", most) from None
            triangles = field.triangles(sizing.inside_share(self.cad, field))
            self._fields = {key: (cones, field, triangles)}
        return self._fields[key]

    def _generate(self, field, scale):
        gmsh = self.gmsh
        set_options(gmsh)
        gmsh.model.mesh.clear()
        for tag in gmsh.model.mesh.field.list():
            gmsh.model.mesh.field.remove(tag)
        size_at = field.lookup(scale)
        gmsh.model.mesh.setSizeCallback(lambda dim, tag, x, y, z, size: size_at(x, y))
        try:
            gmsh.model.mesh.generate(2)
        except Exception as error:
            said = " ".join(str(error).split())
            raise GeometryError(f"the drawing could not be meshed: {said}", reason="mesh_failed") from error
        finally:
            gmsh.model.mesh.removeSizeCallback()

    def _refuse(self, triangles, allowed, slack=1.0, least=""):
        if triangles > slack * allowed:
            raise self._too_many(f"{least}about {float(f'{triangles:.2g}'):.0f}", allowed)

    def _too_many(self, count, allowed):
        return GeometryError(
            f"the mesh would have {count} elements, more than the {allowed} allowed: the narrowest gap"
            f" ({self.gap[0]:.4g} {self.cad.unit}) or an edge is small against the part ({self.cad.size:.4g} {self.cad.unit});"
            " widen the gap, shorten the legs or allow more unknowns",
            reason="too_many_cells",
            details={"allowed": allowed, "narrowest_gap": self.gap[0] * self.cad.metres},
        )


def _repair(cones, places):
    sizes = 0.5 * cones.at(places)
    return sizing.Cones(places, places, sizes, sizes, np.full(len(places), sizing.SLOPE))
