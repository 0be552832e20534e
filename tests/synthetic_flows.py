"""Exact and lubrication flows on curved quadratic meshes, made with numpy: inputs for what shows results."""

from __future__ import annotations

import numpy as np

from fem_flow.flow.nodal import NodalFields, WallCurve
from fem_flow.part.mesh import Corner, Curve, Outline


def grid(nx: int, ny: int, place) -> tuple[np.ndarray, np.ndarray]:
    """A mapped square of 2·nx·ny quadratic triangles; ``place(s, t)`` maps the unit square."""
    mx, my = 2 * nx + 1, 2 * ny + 1
    s, t = np.meshgrid(np.linspace(0, 1, mx), np.linspace(0, 1, my), indexing="ij")
    x, y = place(s.ravel(), t.ravel())
    number = np.arange(mx * my).reshape(mx, my)
    cells = []
    for i in range(0, mx - 2, 2):
        for j in range(0, my - 2, 2):
            n = number[i : i + 3, j : j + 3]
            cells.append([n[0, 0], n[2, 0], n[2, 2], n[1, 0], n[2, 1], n[1, 1]])
            cells.append([n[0, 0], n[2, 2], n[0, 2], n[1, 1], n[1, 2], n[0, 1]])
    return np.column_stack([x, y]), np.array(cells)


def nodal(kind, points, cells, u, v, p, stream, rate, mu=0.04) -> NodalFields:
    p = np.array(p, dtype=float)
    for k, (i, j) in {3: (0, 1), 4: (1, 2), 5: (2, 0)}.items():
        p[cells[:, k]] = (p[cells[:, i]] + p[cells[:, j]]) / 2
    return NodalFields(kind, points, cells, np.array([u, v]), p, rate, np.full(len(points), mu), stream)


def slot(length=0.04, height=0.004, mu=0.04, mean=0.5, nx=20, ny=6):
    """Plane Poiseuille flow, exact. Returns fields, outline, wall curves."""
    pts, cells = grid(nx, ny, lambda s, t: (length * s, height * t))
    x, y = pts.T
    u = 6 * mean * y * (height - y) / height**2
    p = 12 * mu * mean / height**2 * (length - x)
    stream = mean * (3 * y**2 / height - 2 * y**3 / height**2)
    rate = np.abs(6 * mean * (height - 2 * y) / height**2)
    s = np.linspace(0, length, 81)
    walls = [
        WallCurve(
            n,
            1,
            1,
            s,
            np.column_stack([s, np.full_like(s, h)]),
            np.full_like(s, 6 * mu * mean / height),
            12 * mu * mean / height**2 * (length - s),
        )
        for n, h in (("floor", 0.0), ("roof", height))
    ]
    corner = [(0, 0), (length, 0), (length, height), (0, height)]
    curves = tuple(
        Curve(n, r, np.array([corner[i], corner[(i + 1) % 4]], float))
        for i, (n, r) in enumerate([("floor", "wall"), ("outlet", "port"), ("roof", "wall"), ("inlet", "port")])
    )
    outline = Outline(
        "planar", "mm", curves, (), length * height, (0, 0, length, height), height, ((length / 2, 0), (length / 2, height))
    )
    return nodal("planar", pts, cells, u, 0 * u, p, stream, rate, mu), outline, walls


def nozzle(length=0.05, radius=0.008, throat=0.0025, mu=0.04, flow=1e-5, nx=60, ny=10):
    """Flow through a round nozzle in the lubrication limit (locally Hagen–Poiseuille)."""

    def wall(x):
        return radius - (radius - throat) * np.exp(-(((x - 0.5 * length) / (0.16 * length)) ** 2))

    def slope(x):
        return (radius - wall(x)) * 2 * (x - 0.5 * length) / (0.16 * length) ** 2

    pts, cells = grid(nx, ny, lambda s, t: (length * s, t * wall(length * s)))
    x, y = pts.T
    R, e = wall(x), y / wall(x)
    u = 2 * flow / (np.pi * R**2) * (1 - e**2)
    v = u * e * slope(x)
    fine = np.linspace(0, length, 4001)
    grad = 8 * mu * flow / (np.pi * wall(fine) ** 4)
    total = np.concatenate([[0], np.cumsum((grad[1:] + grad[:-1]) / 2 * np.diff(fine))])
    p = np.interp(x, fine, total[-1] - total)
    stream = flow * (2 * e**2 - e**4)
    s = np.linspace(0, length, 241)
    line = np.column_stack([s, wall(s)])
    arc = np.concatenate([[0], np.cumsum(np.linalg.norm(np.diff(line, axis=0), axis=1))])
    walls = [WallCurve("body", 1, 1, arc, line, 4 * mu * flow / (np.pi * wall(s) ** 3), np.interp(s, fine, total[-1] - total))]
    curves = (
        Curve("axis", "axis", np.array([(0, 0), (length, 0)], float)),
        Curve("outlet", "port", np.array([(length, 0), (length, wall(length))])),
        Curve("body", "wall", line[::-1]),
        Curve("inlet", "port", np.array([(0, wall(0.0)), (0, 0)], float)),
        Curve("throat", "section", np.array([(length / 2, 0), (length / 2, throat)])),
    )
    outline = Outline(
        "axisymmetric",
        "mm",
        curves,
        (),
        float(np.trapezoid(wall(s), s)),
        (0, 0, length, radius),
        2 * throat,
        ((length / 2, -throat), (length / 2, throat)),
    )
    return nodal("axisymmetric", pts, cells, u, v, p, stream, 2 * u / R, mu), outline, walls


def ring(inner=0.01, outer=0.016, omega=10.0, mu=0.04, nx=48, ny=4):
    """Circular Couette flow between a turning shaft and a bore: exact, planar, no ports, closed walls."""
    pts, cells = grid(
        nx,
        ny,
        lambda s, t: (
            (inner + (outer - inner) * t) * np.cos(2 * np.pi * s),
            -(inner + (outer - inner) * t) * np.sin(2 * np.pi * s),
        ),
    )
    keep = np.arange(len(pts))
    my = 2 * ny + 1
    keep[-my:] = np.arange(my)  # join the last column to the first
    cells = keep[cells]
    x, y = pts.T
    r = np.hypot(x, y)
    a = -omega * inner**2 / (outer**2 - inner**2)
    b = omega * inner**2 * outer**2 / (outer**2 - inner**2)
    speed = a * r + b / r
    stream = -(a * r**2 / 2 + b * np.log(r / outer))
    angle = np.linspace(np.pi, 3 * np.pi, 181)
    walls = []
    for name, size, sign in (("shaft", inner, -1.0), ("bore", outer, 1.0)):
        line = size * np.column_stack([np.cos(angle), np.sin(angle)])
        shear = sign * 2 * mu * b / size**2 * np.ones(181)
        walls.append(WallCurve(name, 1, 1, size * (angle - np.pi), line, shear, np.zeros(181), True))
    curves = tuple(Curve(w.name, "wall", w.points[::-1] if w.name == "shaft" else w.points) for w in walls)
    outline = Outline(
        "planar",
        "mm",
        curves,
        (),
        np.pi * (outer**2 - inner**2),
        (-outer, -outer, outer, outer),
        outer - inner,
        ((inner, 0), (outer, 0)),
    )
    return nodal("planar", pts, cells, -speed * y / r, speed * x / r, 0 * r, stream, 2 * b / r**2, mu), outline, walls


def box(width=0.01, height=0.01, mu=0.04, n=12):
    """A smooth cellular flow in a closed box: two eddies that turn against each other, the lower one weak."""
    pts, cells = grid(n, n, lambda s, t: (width * s, height * t))
    x, y = pts[:, 0] / width, pts[:, 1] / height
    # stream = sin²(πx) sin²(πy) (y - 0.3), zero with its normal derivative on all four walls
    f, g = np.sin(np.pi * x) ** 2, np.sin(np.pi * y) ** 2 * (y - 0.3)
    df = np.pi * np.sin(2 * np.pi * x)
    dg = np.pi * np.sin(2 * np.pi * y) * (y - 0.3) + np.sin(np.pi * y) ** 2
    scale = 1e-3
    corner = [(0, 0), (width, 0), (width, height), (0, height)]
    names = ["floor", "right", "lid", "left"]
    curves = tuple(Curve(n_, "wall", np.array([corner[i], corner[(i + 1) % 4]], float)) for i, n_ in enumerate(names))
    outline = Outline(
        "planar", "mm", curves, (), width * height, (0, 0, width, height), width, ((0, height / 2), (width, height / 2))
    )
    return (
        nodal("planar", pts, cells, scale * f * dg / height, -scale * df * g / width, x, scale * f * g, 0 * x, mu),
        outline,
        [],
    )


def stepped(kind="axisymmetric", before=0.02, after=0.05, small=0.004, large=0.010):
    """The outline of a sudden expansion with its sharp corner."""
    pts = [(0, 0), (before + after, 0), (before + after, large), (before, large), (before, small), (0, small)]
    names = [
        ("axis", "axis") if kind == "axisymmetric" else ("floor", "wall"),
        ("outlet", "port"),
        ("chamber", "wall"),
        ("face", "wall"),
        ("pipe", "wall"),
        ("inlet", "port"),
    ]
    curves = tuple(Curve(n, r, np.array([pts[i], pts[(i + 1) % 6]], float)) for i, (n, r) in enumerate(names))
    gap = 2 * small if kind == "axisymmetric" else small
    return Outline(
        kind,
        "mm",
        curves,
        (Corner(before, small, 270.0, ("face", "pipe")),),
        0.0,
        (0, 0, before + after, large),
        gap,
        ((before / 2, small - gap), (before / 2, small)),
    )


def upright(length=0.12, height=0.004, **more):
    """The slot turned by a right angle: a tall part."""
    from dataclasses import replace

    fields, outline, walls = slot(length, height, **more)
    turn = lambda p: np.asarray(p)[..., ::-1] * np.array([-1.0, 1.0])  # noqa: E731
    fields = replace(fields, points=turn(fields.points), velocity=np.array([0 * fields.velocity[0], fields.velocity[0]]))
    outline = replace(
        outline,
        curves=tuple(replace(c, points=turn(c.points)) for c in outline.curves),
        box=(-height, 0.0, 0.0, length),
        narrowest_at=tuple(tuple(turn(p)) for p in outline.narrowest_at),
    )
    return fields, outline, [replace(w, points=turn(w.points)) for w in walls]


def needle():
    """The nozzle with a throat that is tiny beside the part, and a stretch of wall where shear is withheld."""
    from dataclasses import replace

    fields, outline, walls = nozzle(radius=0.012, throat=0.0003, nx=120)
    shear = walls[0].shear.copy()
    shear[120:124] = np.nan
    return fields, outline, [replace(walls[0], shear=shear)]


def comb(n=6):
    """The outline of a manifold with many ports and walls, for labels that must not overlap."""
    unit, width, gap = 1e-3, 4.0, 9.0
    pts, names = [(0, 0)], []

    def go(x, y, name, role="wall"):
        pts.append((x, y))
        names.append((name, role))

    total = n * (width + gap) + gap
    for k in range(n):
        x = gap + k * (width + gap)
        go(x, 0, f"rib_{k + 1}")
        go(x, -30, f"branch_{k + 1}_left")
        go(x + width, -30, f"outlet_{k + 1}", "port")
        go(x + width, 0, f"branch_{k + 1}_right")
    go(total, 0, "end_rib")
    go(total, 8, "dead_end")
    go(0, 8, "roof")
    go(0, 0, "inlet", "port")
    pts = np.array(pts) * unit
    curves = tuple(Curve(name, role, pts[k : k + 2]) for k, (name, role) in enumerate(names))
    corners = tuple(Corner(x, 0.0, 270.0, ("a", "b")) for x, y in pts[1:-4] if y == 0)
    return Outline(
        "planar", "mm", curves, corners, 0.0, (0, -0.03, total * unit, 0.008), width * unit, ((0.009, -0.015), (0.013, -0.015))
    )


def result(**changes) -> dict:
    """The content of a result.json with every kind of row: bars, withheld, caution, breaks."""

    def number(quantity, of, value, unit, bar=None, verdict="holds", note=None, definition="a definition"):
        return {
            "quantity": quantity,
            "of": of,
            "value": value,
            "unit": unit,
            "error_bar": bar,
            "verdict": verdict,
            "definition": definition,
            "note": note,
        }

    drop = "flow-weighted total pressure at inlet minus outlet"
    full = {
        "schema": "fem_flow.result/1",
        "title": "Poppet check valve, 1.2 mm lift",
        "fem_flow": "0.1.0",
        "case": {
            "title": "Poppet check valve, 1.2 mm lift",
            "part": {"script": "poppet_valve", "lift": "1.2 mm", "bore": "12 mm"},
            "fluid": {"name": "ISO VG 46", "temperature": "40 degC"},
            "model": {"inertia": True, "ambient": "1.01325 bar"},
            "ports": {"inlet": {"flow_in": "12 L/min"}, "outlet": {"static_pressure": "0 bar"}},
            "accuracy": {"target": "1 %", "of": ["total_pressure_drop inlet outlet"], "unknowns": 400000},
        },
        "numbers": [
            number("flow_rate", ["inlet"], 2e-4, "m^3/s"),
            number("flow_rate", ["outlet"], -2e-4, "m^3/s"),
            number("mean_velocity", ["inlet"], 1.768, "m/s"),
            number("area", ["inlet"], 1.131e-4, "m^2"),
            number("static_pressure", ["inlet"], 21830.0, "Pa", 95.0),
            number("reynolds_number", ["inlet"], 461.0, "1"),
            number("reynolds_number", ["throat"], 840.0, "1"),
            number("kinetic_energy_coefficient", ["inlet"], 2.0, "1"),
            number("total_pressure_drop", ["inlet", "outlet"], 21830.0, "Pa", 95.0, definition=drop),
            number("static_pressure_drop", ["inlet", "outlet"], -2183.0, "Pa", 9.1),
            number("excess_pressure_drop", ["inlet", "outlet"], 19830.0, "Pa", 95.0),
            number(
                "loss_coefficient", ["inlet", "outlet"], 14.56, "1", 0.07, definition="excess drop / (½ρV²), V at the inlet"
            ),
            number("hydraulic_resistance", ["inlet", "outlet"], 1.0915e8, "Pa*s/m^3", 4.7e5),
            number(
                "flow_coefficient_kv", ["inlet", "outlet"], 1.44, "m^3/h", 0.003, definition="from the static drop, at Re 840"
            ),
            number("discharge_coefficient", ["throat"], 0.61, "1", 0.002, verdict="caution"),
            number(
                "wall_shear_max",
                ["seat"],
                None,
                "Pa",
                verdict="caution",
                note="a sharp re-entrant corner at x = 12.4 mm, y = 6 mm lies on this wall: give it an edge radius",
            ),
            number("wall_shear_max", ["poppet"], 412.0, "Pa", 8.0),
            number("wall_shear_p99", ["poppet"], 377.0, "Pa", 2.2),
            number("wall_shear_mean", ["poppet"], 31.4, "Pa", 0.1),
            number("wall_shear_max_at", ["poppet"], 0.0153, "m", 1e-5),
            number("force_x", ["poppet"], 2.31, "N", 0.012),
            number("force_x_pressure", ["poppet"], 2.2, "N", 0.012),
            number("force_x_viscous", ["poppet"], 0.11, "N", 0.001),
            number("dissipated_power", [], 4.366, "W", 0.02),
            number("pressure_min", [], -1240.0, "Pa", 40.0),
            number("narrowest_gap", [], 8.5e-4, "m"),
        ],
        "checks": [
            {
                "check": "converged",
                "of": [],
                "verdict": "holds",
                "says": "relative residual 3e-13, below 1e-10",
                "source": "own limit",
            },
            {
                "check": "laminar",
                "of": ["throat"],
                "verdict": "caution",
                "says": "Re = 840 on twice the gap (0.85 mm), below 2000; the jet behind a valve gap can be "
                "unsteady from about 100 on",
                "source": "common practice",
            },
            {
                "check": "mass_balance",
                "of": [],
                "verdict": "holds",
                "says": "the flows sum to 1e-16 of their size",
                "source": "own limit",
            },
        ],
        "statements": [
            "Steady laminar single-phase 2-D (axisymmetric) computation on nominal geometry. Not a strength, fatigue, "
            "leak-tightness, cavitation, biocompatibility or compliance assessment. Numerical error bars exclude model and "
            "input uncertainty unless stated.",
            "Flow pressures are not design pressures.",
        ],
        "mesh": {"unknowns": 20123, "elements": 4410, "levels": 2},
        "solver": {
            "iterations": 9,
            "residual": 3.1e-13,
            "factorisations": 9,
            "seconds": {"mesh": 0.9, "assemble": 0.8, "factorise": 0.7, "measure": 0.3, "picture": 2.2},
        },
    }
    return {**full, **changes}


BREAKS = {
    "check": "laminar",
    "of": ["inlet"],
    "verdict": "breaks",
    "says": "Re = 5300 on the bore, above 2300: turbulent",
    "source": "Avila et al. 2011",
}
