"""A named, curved mesh as plain arrays: what leaves the drawing process."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np


@dataclass(frozen=True)
class Corner:
    """A sharp re-entrant corner: place in m, fluid angle in degrees, the walls that meet there."""

    x: float
    y: float
    angle: float
    walls: tuple[str, ...]


@dataclass(frozen=True)
class Curve:
    """A piece of the outline (or a section) as a polyline for drawing.

    Attributes
    ----------
    name : its boundary or section name
    role : ``"port"``, ``"wall"``, ``"axis"``, ``"symmetry"`` or ``"section"``
    points : (n, 2), m; the end points lie exactly on the curve's ends
    """

    name: str
    role: str
    points: np.ndarray


@dataclass(frozen=True)
class Outline:
    """The drawn part before it is meshed.

    Attributes
    ----------
    kind : ``"planar"`` or ``"axisymmetric"``
    unit : the script's length unit
    curves : tuple of Curve
    corners : tuple of Corner, the sharp re-entrant ones only
    area : m^2, of the drawn half plane or plane
    box : (xmin, ymin, xmax, ymax), m
    narrowest_gap : m
    narrowest_at : ((x, y), (x, y)), m, the two facing points of the narrowest gap
    """

    kind: str
    unit: str
    curves: tuple[Curve, ...]
    corners: tuple[Corner, ...]
    area: float
    box: tuple[float, float, float, float]
    narrowest_gap: float
    narrowest_at: tuple[tuple[float, float], tuple[float, float]]

    def names(self, role: str) -> tuple[str, ...]:
        """Names with that role, each once, in drawing order."""
        return tuple(dict.fromkeys(c.name for c in self.curves if c.role == role))


@dataclass(frozen=True)
class MeshData:
    """Curved quadratic triangles with named boundaries.

    Attributes
    ----------
    points : (n_nodes, 2), m
    cells : (n_cells, 6), node numbers: corners 0, 1, 2 anticlockwise, then the middles of edges 01, 12, 20
    boundaries : name -> (m, 3) node numbers (start, end, middle) of each edge, the fluid on its left; the names partition the
        boundary
    roles : boundary name -> ``"port"``, ``"wall"``, ``"axis"`` or ``"symmetry"``
    sections : name -> (m, 3) likewise for interior curves, oriented so that the normal to the right of the edge points
        towards +x (towards +y for a section at constant y); that is the positive direction of its flow
    regions : name -> (k,) cell numbers
    node_curve : (n_nodes,) tag of the CAD curve a boundary node lies on, -1 inside
    node_parameter : (n_nodes,) its parameter on that curve, NaN inside
    corners : tuple of Corner
    narrowest_gap : m
    min_scaled_jacobian : smallest scaled Jacobian of the curved elements, positive
    """

    points: np.ndarray
    cells: np.ndarray
    boundaries: dict[str, np.ndarray]
    roles: dict[str, str]
    sections: dict[str, np.ndarray]
    regions: dict[str, np.ndarray]
    node_curve: np.ndarray
    node_parameter: np.ndarray
    corners: tuple[Corner, ...]
    narrowest_gap: float
    min_scaled_jacobian: float

    def names(self, role: str) -> tuple[str, ...]:
        """Boundary names with that role."""
        return tuple(n for n, r in self.roles.items() if r == role)
