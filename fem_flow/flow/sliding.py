"""The direction in which a wall slides along itself."""

from __future__ import annotations

import numpy as np

from fem_flow.errors import CaseError
from fem_flow.flow.boundary import Boundary, connected_runs

TURN = np.radians(15.0)
"""A wall whose edges meet at more than this angle has a corner there."""

BACK = 0.05
"""A wall that leans back by less than this (the sine of 3 degrees) does not turn back: a half circle ends upright."""


def wall_direction(wall: Boundary) -> np.ndarray:
    """Unit tangent at the wall's nodes, (2, n_nodes): towards +x, at a wall of constant x towards +y.

    It is at right angles to the normal of the mass balance, int n phi, so that a curved sliding wall lets nothing pass.

    Raises
    ------
    CaseError : the wall turns back on itself (every closed wall does), or has a sharp corner
    """
    sign = np.zeros(len(wall.edges))
    for run in connected_runs(wall.edges):
        sign[run] = _sign_of(wall, run)
    weight = wall.w if wall.w.min() > 0 else wall.ds
    flow = sign[:, None] * weight
    tangent = np.stack([wall.scatter((flow * wall.tangent[..., k]) @ wall.shapes) for k in (0, 1)])
    length = np.hypot(*tangent)
    return np.divide(tangent, length, out=np.zeros_like(tangent), where=length > 0)


def _sign_of(wall, run):
    """+1 where the edges of a connected run already point the way it slides, -1 where they point against it."""
    start, end = wall.end_tangents
    turn = start[run[1:], 0] * end[run[:-1], 1] - start[run[1:], 1] * end[run[:-1], 0]
    ahead = (start[run[1:]] * end[run[:-1]]).sum(axis=1)
    if (np.abs(np.arctan2(turn, ahead)) > TURN).any():
        raise CaseError(
            f"the wall {wall.name} has a sharp corner, so it cannot slide along itself; give its smooth pieces their own names",
            reason="wall_with_corner", details={"wall": wall.name},
        )
    reach = np.abs(np.einsum("eq,eqc->c", wall.ds[run], wall.tangent[run]))
    axis = 0 if reach[0] > 1e-6 * wall.ds[run].sum() else 1
    along = wall.tangent[run][..., axis]
    if along.min() < -BACK and along.max() > BACK:
        raise CaseError(
            f"the wall {wall.name} turns back on itself, so sliding along it has no one direction; a wall that turns round"
            " a centre needs rotation, which is for a later version",
            reason="wall_turns_back", details={"wall": wall.name},
        )
    return 1.0 if (wall.ds[run] * along).sum() > 0 else -1.0
