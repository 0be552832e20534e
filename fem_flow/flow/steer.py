"""Steering the nonlinear equations to a steady solution: Picard while far, Newton when near, damped, continued in flow rate.

Every attempt is recorded. It ends in a state whose residual is below the tolerance, or in `NotConverged` with the largest
share of the flow for which a steady solution was found.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

import numpy as np

from fem_flow.flow.linear import Factorization, LinearSolveFailed
from fem_flow.flow.system import State, System

TOLERANCE = 1e-10
"""Residual of momentum and of continuity, each relative to the forces (flows) that balance in it."""

PICARD_STEPS = 4
"""At most so many steps of the carrier-frozen (Picard) form before Newton."""

CLOSE = 1e-2
"""Relative residual below which Newton starts at once."""

MAX_STEPS = 25
MAX_SHORT = 4
"""Newton steps of a quarter or less that are taken before the state counts as too far away: more of them wander, at some risk
to another branch of solutions."""

QUICK = 3
"""A stage of continuation that took no more Newton steps than this lets the next one reach three times as far."""

MAX_STAGES = 60
"""Flow rates that continuation tries before it gives up."""

SMALLEST_STEP = 1 / 16
SMALLEST_RAISE = 1 / 256
NEAR = 1e-7
"""Below this relative residual round-off may keep a Newton step from lowering it; the step is taken whole."""


@dataclass
class History:
    """What was done: one record a linear step, and the shares of the flow rate that were reached."""

    steps: list[dict] = field(default_factory=list)
    shares: list[float] = field(default_factory=list)
    residual: float = float("inf")

    @property
    def iterations(self) -> int:
        return len(self.steps)

    def __add__(self, later: History) -> History:
        return History(self.steps + later.steps, list(dict.fromkeys(self.shares + later.shares)), later.residual)


class NotConverged(RuntimeError):
    """No steady solution at the full flow; ``share`` of it was reached, ``state`` is that solution."""

    def __init__(self, share: float, state: State | None, history: History, why: str):
        super().__init__(why)
        self.share, self.state, self.history, self.why = share, state, history, why


def steady(
    system: System, solver: Factorization, start: State | None = None, progress: Callable[[str], None] | None = None
) -> tuple[State, History]:
    """Find the steady state of a system.

    Parameters
    ----------
    start : a state near the solution (of the coarser mesh, of a neighbouring case), or None to begin with Stokes flow

    Raises
    ------
    NotConverged : with what was tried
    LinearSolveFailed : the linear equations are singular
    """
    history = History()
    say = progress or (lambda text: None)
    if start is not None:
        state = _converge(system, solver, system.impose(start), system.rho, history, say, picard=0)
        if state is not None:
            history.shares.append(1.0)
            return state, history
    solver.forget_analysis()
    say("Stokes flow")
    stokes = _converge(system, solver, system.start(), 0.0, history, say, picard=0)
    if stokes is None:
        raise NotConverged(0.0, None, history, "not even creeping flow could be solved")
    if system.rho == 0.0:
        history.shares.append(1.0)
        return stokes, history
    solver.forget_analysis()
    state = _converge(system, solver, stokes, system.rho, history, say, picard=PICARD_STEPS)
    if state is not None:
        history.shares.append(1.0)
        return state, history
    return _continue(system, solver, stokes, history, say), history


def _converge(system, solver, state, rho, history, say, picard):
    """At most ``picard`` Picard steps while far away, then damped Newton; None when it does not converge."""
    vector, relative = system.residual(state, rho)
    share_of_flow = float(rho / system.rho) if system.rho else 1.0
    short = 0
    for step in range(MAX_STEPS + 1):
        history.residual = relative
        if relative <= TOLERANCE:
            return state
        if step == MAX_STEPS or short > MAX_SHORT:
            return None
        newton = step >= picard or (step > 0 and relative < CLOSE)
        try:
            solver.factorise(system.matrix(state, rho, newton))
            delta = solver.solve(-vector)
        except LinearSolveFailed:
            if rho == 0.0:
                raise
            return None
        kind = "Stokes" if rho == 0.0 else "Newton" if newton else "Picard"
        found = _damped(system, state, delta, rho, vector, whole=kind != "Newton" or relative < NEAR)
        if found is None:
            return None
        state, vector, relative, share = found
        short += share <= 0.25
        history.steps.append({"step": kind, "share_of_flow": share_of_flow, "damping": share, "residual": relative})
        say(f"{kind} step {history.iterations}, residual {relative:.1e}")


def _damped(system, state, delta, rho, vector, whole):
    """The longest of the steps 1, 1/2, 1/4 ... that lowers the residual; ``whole`` takes the full step as it is."""
    norm = np.linalg.norm(vector)
    share = 1.0
    while share >= SMALLEST_STEP:
        trial = system.advance(state, delta, share)
        new, relative = system.residual(trial, rho)
        size = np.linalg.norm(new)
        if np.isfinite(size) and (whole or size <= (1 - 0.2 * share) * norm):
            return trial, new, relative, share
        share /= 2
    return None


def _continue(system, solver, stokes, history, say):
    """Raise the flow rate in steps (the same as raising the density: velocities and pressures scale with the share)."""
    share, state, before, ahead = 0.0, stokes, None, 0.25
    for _ in range(MAX_STAGES):
        target = min(1.0, share + ahead)
        guess = state
        if before is not None:
            old_share, old = before
            slope = (target - share) / (share - old_share)
            guess = State(*(new + slope * (new - past) for new, past in zip(_parts(state), _parts(old), strict=True)))
        say(f"continuation: {100 * target:.0f} % of the flow")
        done = history.iterations
        new = _converge(system, solver, guess, target * system.rho, history, say, picard=1 if before is None else 0)
        if new is None:
            ahead /= 2
            if ahead < SMALLEST_RAISE:
                break
            continue
        before, share, state = (share, state), target, new
        history.shares.append(share)
        if share == 1.0:
            return state
        ahead *= 3.0 if history.iterations - done <= QUICK else 1.6
    raise NotConverged(share, state if share > 0 else None, history, "the flow rate could not be raised further")


def _parts(state):
    return state.u, state.p, state.ports
