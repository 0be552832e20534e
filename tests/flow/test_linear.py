"""The checked solve: the same contract for every direct solver of this machine, and the ladder between them."""

from __future__ import annotations

import platform
import resource

import numpy as np
import pytest
import scipy.sparse as sparse

from fem_flow.flow.linear import Factorization, LinearSolveFailed, judge, ladder

SINGULAR = (
    "the linear equations could not be solved: the matrix is singular (a velocity without a condition, or a region that is not"
    " connected to the rest)"
)
RUNGS = sorted(ladder())


def plain(n=40):
    """A matrix that every solver can take, matching or not."""
    return sparse.csr_matrix(sparse.random(n, n, 0.2, random_state=np.random.default_rng(0)) + 4 * sparse.eye(n))


def saddle(n=30):
    """A matrix with the zero block of flow equations."""
    rng = np.random.default_rng(0)
    a = sparse.random(n, n, 0.2, random_state=rng) + 4 * sparse.eye(n)
    b = sparse.random(n // 3, n, 0.3, random_state=rng) + sparse.eye(n // 3, n)
    return sparse.csr_matrix(sparse.block_array([[a, b.T], [b, None]]))


def right_side(matrix, seed=1):
    return np.random.default_rng(seed).normal(size=matrix.shape[0])


@pytest.fixture(params=RUNGS)
def solver(request):
    with Factorization(rungs={request.param: ladder()[request.param]}) as made:
        yield made


def test_pardiso_is_there_where_its_wheel_exists():
    assert ("pardiso" in RUNGS) == (platform.machine() in ("x86_64", "AMD64"))
    assert list(ladder())[-1] == "superlu"


def test_solution_and_its_true_residual(solver):
    matrix = plain()
    b = right_side(matrix)
    solver.factorise(matrix)
    x = solver.solve(b)
    np.testing.assert_allclose(x, np.linalg.solve(matrix.toarray(), b), rtol=1e-9)
    assert np.linalg.norm(matrix @ x - b) < 1e-12 * np.linalg.norm(b)
    assert 0 < solver.counts.worst_residual < 1e-12
    assert solver.counts.seconds > 0


@pytest.mark.parametrize("rung", [r for r in RUNGS if r != "pardiso without matching"])
def test_saddle_point(rung):
    """The zero block needs pivoting; the rung without matching is not meant for it."""
    matrix = saddle()
    b = right_side(matrix)
    with Factorization(rungs={rung: ladder()[rung]}) as made:
        made.factorise(matrix)
        np.testing.assert_allclose(made.solve(b), np.linalg.solve(matrix.toarray(), b), rtol=1e-9)


def test_right_side_may_be_strided_or_of_integers_and_stays_as_it_was(solver):
    matrix = plain()
    solver.factorise(matrix)
    wide = np.stack([right_side(matrix), right_side(matrix, 2)], axis=1)
    before = wide.copy()
    np.testing.assert_array_equal(solver.solve(wide[:, 0]), solver.solve(wide[:, 0].copy()))
    np.testing.assert_array_equal(wide, before)
    whole = np.arange(matrix.shape[0])
    np.testing.assert_array_equal(solver.solve(whole), solver.solve(whole.astype(float)))


def test_zero_right_side(solver):
    matrix = plain()
    solver.factorise(matrix)
    np.testing.assert_array_equal(solver.solve(np.zeros(matrix.shape[0])), 0.0)


def test_singular_matrix(solver):
    matrix = plain().tolil()
    matrix[5] = matrix[6]
    solver.factorise(sparse.csr_matrix(matrix))
    with pytest.raises(LinearSolveFailed) as caught:
        solver.solve(right_side(matrix))
    assert str(caught.value) == SINGULAR


def test_empty_row(solver):
    matrix = plain().tolil()
    matrix[5] = 0.0
    matrix = sparse.csr_matrix(matrix)
    solver.factorise(matrix)
    with pytest.raises(LinearSolveFailed) as caught:
        solver.solve(right_side(matrix))
    assert str(caught.value) == SINGULAR


def test_nan_in_the_matrix(solver):
    matrix = plain()
    matrix.data[7] = np.nan
    solver.factorise(matrix)
    with pytest.raises(LinearSolveFailed):
        solver.solve(right_side(matrix))


def test_usable_again_after_a_singular_matrix(solver):
    matrix, b = plain(), right_side(plain())
    broken = matrix.tolil()
    broken[5] = broken[6]
    solver.factorise(sparse.csr_matrix(broken))
    with pytest.raises(LinearSolveFailed):
        solver.solve(b)
    solver.factorise(matrix)
    assert np.linalg.norm(matrix @ solver.solve(b) - b) < 1e-12 * np.linalg.norm(b)


def test_analysis_is_kept_where_the_solver_can(solver):
    matrix, b = plain(), right_side(plain())
    rng = np.random.default_rng(4)
    for _ in range(5):
        matrix = matrix.copy()
        matrix.data *= 1 + 0.01 * rng.normal(size=matrix.nnz)
        solver.factorise(matrix)
        assert np.linalg.norm(matrix @ solver.solve(b) - b) < 1e-10 * np.linalg.norm(b)
    assert solver.counts.factorisations == solver.counts.solves == 5
    keeps = solver.counts.rung != "superlu"
    assert solver.counts.analyses == (1 if keeps else 5)
    solver.forget_analysis()
    solver.factorise(matrix)
    assert solver.counts.analyses == (2 if keeps else 6)


def test_closing_twice_and_unused_is_harmless(solver):
    solver.close()
    solver.factorise(plain())
    solver.close()
    solver.close()


def test_solver_works_after_closing(solver):
    matrix, b = plain(), right_side(plain())
    solver.factorise(matrix)
    solver.close()
    solver.factorise(matrix)
    assert np.linalg.norm(matrix @ solver.solve(b) - b) < 1e-12 * np.linalg.norm(b)
    assert solver.counts.analyses == 2


@pytest.mark.parametrize("rung", RUNGS)
def test_memory_does_not_grow_over_twenty_solvers(rung):
    """An instance of the native solver that is not freed keeps its factors; the growth allowed is that of a few in all."""
    n = 60
    line = sparse.diags_array([-np.ones(n - 1), 2.5 * np.ones(n), -np.ones(n - 1)], offsets=[-1, 0, 1])
    matrix = sparse.csr_matrix(sparse.kron(line, sparse.eye(n)) + sparse.kron(sparse.eye(n), line))
    b = right_side(matrix)

    def once():
        with Factorization(rungs={rung: ladder()[rung]}) as made:
            made.factorise(matrix)
            made.solve(b)

    for _ in range(3):
        once()
    before = _resident()
    for _ in range(20):
        once()
    assert _resident() - before < 30e6


def _resident():
    try:
        with open("/proc/self/statm") as file:
            return int(file.read().split()[1]) * resource.getpagesize()
    except FileNotFoundError:
        return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss


class Fake:
    """A backend that follows a script of what its solves return; ``log`` records what was asked of it."""

    keeps_analysis = True

    def __init__(self, name, answers, log):
        self.name, self.answers, self.log = name, answers, log

    def factorise(self, matrix, keep_analysis):
        self.matrix = matrix
        self.log.append((self.name, "kept" if keep_analysis else "fresh"))
        return 130

    def solve(self, rhs):
        self.log.append((self.name, "solve"))
        kind = self.answers.pop(0) if len(self.answers) > 1 else self.answers[0]
        good = np.linalg.solve(self.matrix.toarray(), rhs)
        if kind == "raises":
            raise ArithmeticError("no")
        garbage = 1e30 * np.cos(np.arange(len(rhs)))
        return {"good": good, "garbage": garbage, "nan": good * np.nan, "poor": good * (1 + 1e-8)}[kind]

    def close(self):
        self.log.append((self.name, "closed"))


def climb(**answers):
    log = []
    rungs = {name: (lambda name=name, given=given: Fake(name, list(given), log)) for name, given in answers.items()}
    return Factorization(rungs=rungs), log


def test_ladder_tries_every_rung_on_garbage_and_ends_in_a_typed_error():
    made, log = climb(first=["garbage"], second=["nan"], third=["raises"])
    matrix = plain()
    with made:
        made.factorise(matrix)
        with pytest.raises(LinearSolveFailed) as caught:
            made.solve(right_side(matrix))
    assert str(caught.value) == SINGULAR
    assert log == [
        ("first", "fresh"), ("first", "solve"), ("first", "closed"), ("second", "fresh"), ("second", "solve"),
        ("second", "closed"), ("third", "fresh"), ("third", "solve"), ("third", "closed"),
    ]
    assert (made.counts.factorisations, made.counts.analyses, made.counts.solves) == (3, 3, 3)


@pytest.mark.parametrize("bad", ["garbage", "nan", "poor", "raises"])
def test_ladder_stops_at_the_first_good_rung_and_stays_there(bad):
    made, log = climb(first=[bad], second=["good"])
    matrix = plain()
    b = right_side(matrix)
    with made:
        made.factorise(matrix)
        np.testing.assert_allclose(matrix @ made.solve(b), b, atol=1e-12)
        made.factorise(matrix)
        made.solve(b)
    assert made.counts.rung == "second"
    assert log[-3:] == [("second", "kept"), ("second", "solve"), ("second", "closed")]
    assert (made.counts.factorisations, made.counts.analyses, made.counts.solves) == (3, 2, 3)
    assert made.counts.perturbed_pivots == 130


def test_an_analysis_that_has_become_bad_is_redone_once_before_climbing():
    made, log = climb(first=["good", "poor", "good"], second=["good"])
    matrix = plain()
    b = right_side(matrix)
    with made:
        for _ in range(2):
            made.factorise(matrix)
            made.solve(b)
    assert made.counts.rung == "first"
    assert log == [
        ("first", "fresh"), ("first", "solve"), ("first", "kept"), ("first", "solve"), ("first", "fresh"), ("first", "solve"),
        ("first", "closed"),
    ]
    assert (made.counts.factorisations, made.counts.analyses, made.counts.solves) == (3, 2, 3)


def test_memory_that_does_not_suffice_is_said_at_once():
    class Small(Fake):
        def factorise(self, matrix, keep_analysis):
            raise MemoryError

    made = Factorization(rungs={"small": lambda: Small("small", ["good"], []), "next": lambda: Fake("next", ["good"], [])})
    with made, pytest.raises(LinearSolveFailed) as caught:
        made.factorise(plain())
    assert str(caught.value) == (
        "the memory of this machine does not suffice for 40 unknowns; allow fewer with [accuracy] unknowns"
    )


def test_each_block_is_judged_by_its_own_size():
    """An error of 1e-6 of the small equations hides in the norm of the whole, not in that of its block."""
    matrix = sparse.csr_matrix(np.diag([1e6, 1e6, 1.0, 1.0]))
    x = np.ones(4)
    b = matrix @ x
    wrong = x + [0, 0, 1e-5, 0]
    blocks = (slice(0, 2), slice(2, 4))
    assert judge(matrix, wrong, b, (slice(None),)).good
    assert not judge(matrix, wrong, b, blocks).good
    assert judge(matrix, x, b, blocks).good


def test_a_huge_solution_of_a_singular_matrix_is_no_solution():
    """Small against |A||x|, large against b."""
    matrix = sparse.csr_matrix(np.ones((2, 2)))
    x = np.array([-1e16, 1e16])
    judged = judge(matrix, x, np.array([0.0, 1.0]), (slice(None),))
    assert judged.share < 1e-10
    assert not judged.good
