"""The one place that runs a case: draw, mesh, solve, measure, refine; then the result writes itself."""

from __future__ import annotations

import time
from collections.abc import Callable

import numpy as np

from fem_flow.case.check import parameter_values, resolve, script_reference
from fem_flow.case.model import Case
from fem_flow.case.resolved import ResolvedCase
from fem_flow.errors import CaseError, GeometryError, NoSteadySolution
from fem_flow.flow.problem import solve
from fem_flow.flow.solution import Solution
from fem_flow.measure.all import measure
from fem_flow.measure.number import Number
from fem_flow.part.drawing import Drawing
from fem_flow.part.find import find_script
from fem_flow.part.mesh import MeshData, Outline
from fem_flow.result import Preview, Result
from fem_flow.trust.bars import SAID, missed, wanted, with_bars
from fem_flow.trust.checks import checks, judged
from fem_flow.trust.statements import statements

Progress = Callable[[str, float | None], None]
COARSEST = 30.0
"""Multiple of the automatic sizes beyond which a part is not meshed more coarsely."""
FINEST_START = 0.25
"""Where a mesh holds no steady flow, finer ones are tried down to this multiple of the automatic sizes."""
UNKNOWNS_PER_CELL = 4.5
"""Two velocities a node (two nodes a cell) and a pressure a corner (half a corner a cell)."""
NO_LIMIT = 10**12


def run(case: Case, progress: Progress | None = None) -> Result:
    """Draw, mesh, solve and measure a case, refining until the accuracy asked for is met.

    Raises
    ------
    CaseError : the input is wrong
    GeometryError : the part cannot be drawn or meshed with these dimensions
    NoSteadySolution : no steady flow was found
    """
    say = progress or (lambda text, share=None: None)
    with _drawing(case) as drawing:
        outline, resolved = _drawn(case, drawing, say)
        return _refined(case, drawing, outline, resolved, say)


def preview(case: Case) -> Preview:
    """Draw a case with its ports and walls named, and tell Reynolds numbers and areas; nothing is solved.

    Raises
    ------
    CaseError, GeometryError
    """
    from fem_flow.measure.preview import port_table

    with _drawing(case) as drawing:
        outline, resolved = _drawn(case, drawing, lambda text, share=None: None)
        return Preview(resolved, outline, tuple(port_table(outline, resolved)))


def _drawing(case):
    return Drawing(find_script(script_reference(case), case.folder))


def _drawn(case, drawing, say) -> tuple[Outline, ResolvedCase]:
    say("drawing the part", 0.0)
    values = parameter_values(case, drawing.declare())
    declaration = drawing.declare(values)
    outline = drawing.draw(values)
    return outline, resolve(case, declaration, outline.names("wall"))


def _refined(case, drawing, outline, resolved, say) -> Result:
    meshes = _Meshes(drawing, outline, resolved, say)
    scale, solution, numbers = _first_pair(meshes)
    while missed(numbers, resolved.accuracy):
        scale /= 2
        mesh = meshes.mesh(scale) if 3 * solution.unknowns < meshes.limit else None
        if mesh is None:
            break
        finer, measured = meshes.solve(mesh, solution)
        solution, numbers = finer, with_bars(measured, numbers)
    found = checks(solution, numbers)
    numbers = judged(numbers, found)
    failed = missed(numbers, resolved.accuracy)
    said = [*statements(solution, numbers, found), f"An error bar is {SAID}.", *_accuracy_statements(numbers, failed, resolved)]
    return Result(
        case=case, resolved=resolved, outline=outline, solution=solution, listed=tuple(numbers), found=tuple(found),
        statements=tuple(said), levels=meshes.solved, solver=meshes.report(solution), missed=tuple(failed),
    )


def _first_pair(meshes: _Meshes) -> tuple[float, Solution, list[Number]]:
    """Size, solution and numbers with bars of the finer of the first two meshes.

    Both are coarser than the automatic sizes where few unknowns are allowed, finer where the coarse one holds no steady flow.
    """
    scale = 1.0
    while (fine := meshes.mesh(scale)) is None:
        scale *= 1.5
        if scale > COARSEST:
            raise CaseError(
                f"[accuracy] unknowns = {meshes.limit} is too few for this part: even a coarse mesh needs more; raise it",
                reason="too_few_unknowns", details={"unknowns": meshes.limit},
            )
    coarse = meshes.mesh(2 * scale)
    while True:
        try:
            start, first = meshes.solve(coarse, None)
            break
        except NoSteadySolution:
            coarse, scale = fine, scale / 2
            fine = meshes.mesh(scale) if scale >= FINEST_START else None
            if fine is None:
                raise
            meshes.say("no steady flow on this mesh, trying a finer one", None)
    solution, numbers = meshes.solve(fine, start)
    return scale, solution, with_bars(numbers, first)


class _Meshes:
    """The meshes of one design at different sizes, and what meshing and solving them cost."""

    def __init__(self, drawing: Drawing, outline: Outline, resolved: ResolvedCase, say: Progress):
        self.drawing, self.resolved, self.say = drawing, resolved, say
        self.grade_at = lid_corners(resolved, outline)
        self.limit = resolved.accuracy.unknowns if resolved.accuracy else NO_LIMIT
        self.solved = self.iterations = self.factorisations = 0
        self.seconds = {"mesh": 0.0, "assemble": 0.0, "factorise": 0.0, "measure": 0.0, "picture": 0.0}

    def mesh(self, scale: float) -> MeshData | None:
        """The mesh at ``scale`` times the automatic sizes, or None where it has more unknowns than allowed."""
        clock = time.perf_counter()
        self.say(f"meshing at {scale:.3g} times the automatic size", None)
        try:
            mesh = self._well_shaped(scale)
        except GeometryError as error:
            if error.reason == "too_many_cells" and self.limit != NO_LIMIT:
                return None
            raise
        finally:
            self.seconds["mesh"] += time.perf_counter() - clock
        return mesh if 2 * len(mesh.points) + len(np.unique(mesh.cells[:, :3])) <= self.limit else None

    def _well_shaped(self, scale):
        """The mesh at about this size; a slightly finer one where the mesher leaves a bad element."""
        for finer in (1.0, 0.9, 0.8):
            try:
                return self.drawing.mesh(
                    scale=finer * scale, size=self.resolved.mesh_size, near_walls=self.resolved.mesh_near_walls,
                    grade_at=self.grade_at, max_cells=None if self.limit == NO_LIMIT else int(self.limit / UNKNOWNS_PER_CELL),
                )
            except GeometryError as error:
                if error.reason != "bad_elements" or finer == 0.8:
                    raise

    def solve(self, mesh: MeshData, start: Solution | None) -> tuple[Solution, list[Number]]:
        """Solution and numbers on a mesh, begun from the solution on another."""
        self.say(f"solving on {len(mesh.cells)} elements", None)
        solution = solve(mesh, self.resolved, start, lambda text: self.say(text, None))
        clock = time.perf_counter()
        numbers = measure(solution)
        self.seconds["measure"] += time.perf_counter() - clock
        for stage, spent in solution.seconds.items():
            self.seconds[stage] += spent
        self.solved += 1
        self.iterations += solution.history.iterations
        self.factorisations += solution.counts.factorisations
        return solution, numbers

    def report(self, solution: Solution) -> dict:
        """What ``solver`` of the result holds."""
        return {
            "iterations": self.iterations, "residual": solution.history.residual, "factorisations": self.factorisations,
            "seconds": {stage: round(spent, 4) for stage, spent in self.seconds.items()},
        }


def lid_corners(resolved: ResolvedCase, outline: Outline) -> list[tuple[float, float]]:
    """Points (m) where a sliding wall touches a wall that moves differently; the stress is singular there."""
    ends: dict[tuple[float, float], set[float]] = {}
    size = 1e-6 * max(outline.box[2] - outline.box[0], outline.box[3] - outline.box[1])
    for curve in outline.curves:
        if curve.role != "wall":
            continue
        condition = resolved.walls.get(curve.name)
        speed = condition.value if condition is not None and condition.what == "sliding" else 0.0
        for x, y in (curve.points[0], curve.points[-1]):
            key = next((k for k in ends if abs(k[0] - x) < size and abs(k[1] - y) < size), (float(x), float(y)))
            ends.setdefault(key, set()).add(speed)
    return [place for place, speeds in ends.items() if len(speeds) > 1]


def _accuracy_statements(numbers, failed, resolved) -> list[str]:
    """Which figures the accuracy asked for could not be reached for, and which it leaves out because they are withheld."""
    if resolved.accuracy is None:
        return []
    said = []
    left_out = [n for n in wanted(numbers, resolved.accuracy) if n.withheld]
    if left_out:
        said.append(f"Withheld, so left out of the accuracy asked for: {_names(left_out)}.")
    if failed:
        most = resolved.accuracy.unknowns
        said.append(f"The accuracy asked for was not reached within {most} unknowns for: {_names(failed)}.")
    return said


def _names(numbers):
    return ", ".join(" ".join((n.name, *n.of)) for n in numbers)
