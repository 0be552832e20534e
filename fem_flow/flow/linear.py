"""One factorisation with a checked solve: PARDISO where its wheel exists, otherwise SuperLU.

A direct solver can return nonsense without an error, so every solve is judged by its true residual here and nowhere else.
"""

from __future__ import annotations

import copy
import functools
import time
from collections.abc import Callable
from dataclasses import dataclass
from typing import Protocol

import numpy as np
import scipy.sparse as sparse

TOLERANCE = 1e-10
WORST = 1e-6


class LinearSolveFailed(RuntimeError):
    """No rung of the ladder gave a finite solution with a small true residual."""


@dataclass
class Counts:
    """How often each costly thing was done and how long it took; the rung of the ladder in use; the most pivots perturbed."""

    analyses: int = 0
    factorisations: int = 0
    solves: int = 0
    rung: str = ""
    worst_residual: float = 0.0
    perturbed_pivots: int = 0
    seconds: float = 0.0

    def __add__(self, later: Counts) -> Counts:
        return Counts(
            self.analyses + later.analyses, self.factorisations + later.factorisations, self.solves + later.solves,
            later.rung or self.rung, max(self.worst_residual, later.worst_residual),
            max(self.perturbed_pivots, later.perturbed_pivots), self.seconds + later.seconds,
        )


class Backend(Protocol):
    """A direct solver. ``keeps_analysis`` tells whether the analysis of an earlier matrix can serve a later one.

    1. ``factorise(matrix, keep_analysis)`` raises ArithmeticError, RuntimeError or ValueError where it cannot, MemoryError
       where the memory does not suffice; it returns the number of pivots it had to perturb.
    2. ``solve(rhs)`` may return nonsense: the caller judges it. It raises ArithmeticError or RuntimeError where it cannot.
    3. ``close()`` frees native memory and is harmless at any time.
    """

    keeps_analysis: bool

    def factorise(self, matrix: sparse.csr_matrix, keep_analysis: bool) -> int: ...

    def solve(self, rhs: np.ndarray) -> np.ndarray: ...

    def close(self) -> None: ...


class Factorization:
    """Factorise matrices of one pattern and solve with them.

    Use as a context manager: the memory of the native library is freed on exit. ``blocks`` are index ranges (slices) of the
    unknowns whose residuals are judged apart, because momentum and continuity have different sizes. ``rungs`` are the solvers
    to try in turn, name -> maker of a `Backend`.
    """

    def __init__(self, blocks: tuple[slice, ...] = (slice(None),), rungs: dict[str, Callable[[], Backend]] | None = None):
        self.blocks = blocks
        self.counts = Counts()
        self._rungs = ladder() if rungs is None else rungs
        self._backend: Backend | None = None
        self._matrix = None
        self._analysed = self._fresh = self._broken = False

    def __enter__(self) -> Factorization:
        return self

    def __exit__(self, *_) -> None:
        self.close()

    def close(self) -> None:
        """Free the native memory; harmless when nothing was factorised."""
        if self._backend is not None:
            self._backend.close()
            self._backend = None
        self._analysed = False

    def factorise(self, matrix: sparse.csr_matrix) -> None:
        """Factorise ``matrix``; the analysis of an earlier matrix of the same pattern is kept."""
        self._matrix = matrix
        if self._backend is None:
            self._start(self.counts.rung or next(iter(self._rungs)))
        self._factorise(keep_analysis=self._analysed and self._backend.keeps_analysis)

    def forget_analysis(self) -> None:
        """Analyse the next matrix afresh. An analysis sees values: one made on the Stokes matrix can spoil the later ones."""
        self._analysed = False

    def solve(self, rhs: np.ndarray) -> np.ndarray:
        """Solve with the matrix factorised last.

        Raises
        ------
        LinearSolveFailed : every rung gave a non-finite solution or a true residual above 1e-10, or the memory ran out
        """
        rhs = np.ascontiguousarray(rhs, dtype=float)
        while True:
            x = self._try(rhs)
            if x is not None:
                return x
            if self._fresh:
                self._climb()
            self._factorise(keep_analysis=False)

    def _climb(self):
        names = list(self._rungs)
        rung = names.index(self.counts.rung) + 1
        if rung >= len(names):
            raise LinearSolveFailed(
                "the linear equations could not be solved: the matrix is singular (a velocity without a condition, or a"
                " region that is not connected to the rest)"
            )
        self._start(names[rung])

    def _start(self, rung):
        self.close()
        self._backend = self._rungs[rung]()
        self.counts.rung = rung

    def _factorise(self, keep_analysis):
        self._fresh = not keep_analysis
        self.counts.factorisations += 1
        self.counts.analyses += not keep_analysis
        self._analysed, self._broken = True, False
        try:
            perturbed = self._timed(self._backend.factorise, self._matrix, keep_analysis)
            self.counts.perturbed_pivots = max(self.counts.perturbed_pivots, perturbed)
        except MemoryError as error:
            raise LinearSolveFailed(
                f"the memory of this machine does not suffice for {self._matrix.shape[0]} unknowns; allow fewer with"
                " [accuracy] unknowns"
            ) from error
        except (ArithmeticError, RuntimeError, ValueError):
            self._broken = True

    def _timed(self, work, *arguments):
        clock = time.perf_counter()
        try:
            return work(*arguments)
        finally:
            self.counts.seconds += time.perf_counter() - clock

    def _try(self, rhs):
        if self._broken:
            return None
        self.counts.solves += 1
        try:
            x = self._timed(self._backend.solve, rhs)
        except (ArithmeticError, RuntimeError):
            return None
        if not np.isfinite(x).all():
            return None
        judged = judge(self._matrix, x, rhs, self.blocks)
        if not judged.good:
            return None
        self.counts.worst_residual = max(self.counts.worst_residual, judged.relative)
        return x


@dataclass(frozen=True)
class Judged:
    """True residuals: ``relative`` is |Ax - b| / |b|, ``share`` the largest |Ax - b| / (|A||x| + |b|) of a block."""

    relative: float
    share: float
    reachable: float

    @property
    def good(self) -> bool:
        return self.relative <= self.reachable and self.share <= TOLERANCE


def judge(matrix: sparse.csr_matrix, x: np.ndarray, rhs: np.ndarray, blocks: tuple[slice, ...]) -> Judged:
    """Judge a solution by its true residual, in the 2-norm.

    The whole residual is held against the right-hand side: a singular matrix gives a huge x and a residual that is small
    against |A||x| but not against b. ``reachable`` is 1e-10, or round-off where terms cancel so much that 1e-10 is out of
    reach, never above 1e-6. Each block is held against its own terms: momentum and continuity have different sizes.
    """
    residual = np.abs(matrix @ x - rhs)
    terms = sparse.csr_matrix((np.abs(matrix.data), matrix.indices, matrix.indptr), matrix.shape) @ np.abs(x) + np.abs(rhs)
    shares = [_quotient(residual[block], terms[block]) for block in blocks]
    reachable = 10 * np.finfo(float).eps * _quotient(terms, rhs)
    return Judged(_quotient(residual, rhs), max(shares), min(max(TOLERANCE, reachable), WORST))


def _quotient(part, whole):
    """Ratio of 2-norms; 0 where both vanish."""
    size = np.linalg.norm(part)
    with np.errstate(over="ignore"):
        return float(size / max(np.linalg.norm(whole), np.finfo(float).tiny)) if size else 0.0


def ladder() -> dict[str, Callable[[], Backend]]:
    """The solvers of this machine, the best first."""
    try:
        import pypardiso  # noqa: F401
    except ImportError:
        return {"superlu": SuperLU}
    return {"pardiso": Pardiso, "pardiso without matching": lambda: Pardiso(matching=False), "superlu": SuperLU}


class SuperLU:
    """SciPy's direct solver; every factorisation analyses afresh."""

    keeps_analysis = False

    def __init__(self):
        self._lu = None

    def factorise(self, matrix, keep_analysis):
        from scipy.sparse.linalg import splu

        self._lu = splu(matrix.tocsc(), permc_spec="COLAMD")
        return 0

    def solve(self, rhs):
        return self._lu.solve(rhs)

    def close(self):
        self._lu = None


@functools.cache
def _pardiso_template():
    from pypardiso import ps

    return ps


def _new_pardiso():
    """A fresh solver; finding the native library takes a quarter of a second and is done once in a process."""
    solver = copy.copy(_pardiso_template())
    solver.pt, solver.iparm, solver.perm = solver.pt.copy(), solver.iparm.copy(), solver.perm.copy()
    return solver


class Pardiso:
    """The phases of PARDISO called one by one, so that an analysis can be kept (the public call redoes it).

    ``matching=False`` takes scaling and matching off and refines twice: the default is right for saddle points of flow, but
    returns garbage for some other matrices.
    """

    keeps_analysis = True
    OUT_OF_MEMORY = -2

    def __init__(self, matching: bool = True):
        self._solver = _new_pardiso()
        if not matching:
            for parameter, value in ((1, 1), (2, 2), (8, 2), (10, 13), (11, 0), (13, 0)):
                self._solver.set_iparm(parameter, value)
        self._used = False

    def factorise(self, matrix, keep_analysis):
        if np.diff(matrix.indptr).min() == 0:
            raise ValueError("a row of the matrix is empty")
        matrix.sort_indices()
        self._matrix = matrix
        self._used = True
        self._call(22 if keep_analysis else 12, np.zeros(matrix.shape[0]))
        return int(self._solver.get_iparm(14))

    def solve(self, rhs):
        return self._call(33, rhs)

    def close(self):
        if self._used:
            self._solver.free_memory(everything=True)
            self._used = False

    def _call(self, phase, rhs):
        from pypardiso.pardiso_wrapper import PyPardisoError

        self._solver.set_phase(phase)
        try:
            return self._solver._call_pardiso(self._matrix, rhs)
        except PyPardisoError as error:
            if error.value == self.OUT_OF_MEMORY:
                raise MemoryError(str(error)) from error
            raise ArithmeticError(str(error)) from error
