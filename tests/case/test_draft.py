"""A draft is a case file that runs as it is."""

import tomllib
from dataclasses import replace

import pytest
from declarations import CAVITY, CAVITY_WALLS, MANIFOLD, MANIFOLD_WALLS, POPPET, POPPET_WALLS

from fem_flow.case.check import parameter_values, resolve
from fem_flow.case.declaration import Parameter
from fem_flow.case.draft import REYNOLDS, draft
from fem_flow.case.model import Case

TINY = replace(MANIFOLD, unit="um", parameters={"form": Parameter("a", choices=["a", "b"]), "width": Parameter("50 um")})
BARE = replace(MANIFOLD, parameters={"count": Parameter(2, low=1)})
ODD = replace(POPPET, ports=("inlet 1", "øst"), says='Says "this".')


@pytest.mark.parametrize(
    ("declaration", "walls"),
    [(POPPET, POPPET_WALLS), (MANIFOLD, MANIFOLD_WALLS), (CAVITY, CAVITY_WALLS), (TINY, MANIFOLD_WALLS), (BARE, ()), (ODD, ())],
    ids=["poppet", "manifold", "cavity", "tiny", "bare", "odd"],
)
def test_a_draft_is_read_and_resolved_unedited(tmp_path, declaration, walls):
    path = tmp_path / "draft.toml"
    path.write_text(draft(declaration, walls), encoding="utf-8")
    case = Case.read(path)
    resolved = resolve(case, declaration, walls or ("wall",))
    assert list(case.part.parameters) == list(declaration.parameters)
    assert resolved.values == parameter_values(Case(part={"script": "x"}, fluid=case.fluid), declaration)  # the defaults
    assert list(resolved.ports) == list(declaration.ports)
    assert resolved.ambient == 101325.0


def test_the_first_port_flows_at_a_laminar_reynolds_number(tmp_path):
    for declaration, size, fluid in ((POPPET, 12e-3, "ISO VG 46"), (TINY, 50e-6, "water")):
        path = tmp_path / "draft.toml"
        path.write_text(draft(declaration))
        r = resolve(Case.read(path), declaration, ("wall",))
        first, *others = r.ports.values()
        assert first.what == "velocity"
        assert first.value * size * r.fluid.density / r.fluid.viscosity == pytest.approx(REYNOLDS, rel=0.05)
        assert all((c.what, c.value) == ("static_pressure", 0.0) for c in others)
        assert r.fluid.name == fluid


def test_what_is_commented_out_is_the_default(tmp_path):
    """Taking the comment signs away from the accuracy table changes nothing."""
    text = draft(MANIFOLD)
    start = text.index("# [accuracy]")
    lines = [line.removeprefix("# ") for line in text[start:].splitlines()]
    (tmp_path / "a.toml").write_text(text)
    (tmp_path / "b.toml").write_text(text[:start] + "\n".join(lines))
    a, b = (resolve(Case.read(tmp_path / name), MANIFOLD, MANIFOLD_WALLS) for name in ("a.toml", "b.toml"))
    assert a == b
    assert tomllib.loads("\n".join(lines))["accuracy"]["unknowns"] == 400_000


def test_a_draft_tells_limits_and_meaning():
    lines = draft(POPPET).splitlines()
    assert 'bore = "12 mm"                  # diameter of the inlet bore; 2 mm to 60 mm' in lines
    assert 'stem = "plain"                  # form of the stem; one of plain, necked' in lines
    assert "guides = 0                      # number of guide rings; 0 to 4" in lines
    assert "ratio = 1.5                     # chamber over bore; at least 1.0" in lines
    assert "vented = false                  # whether the stem has a vent; true or false" in lines
    assert lines[0] == 'title = "Poppet valve with a conical seat"'
    assert not any(line.startswith("depth") for line in lines)
    assert any(line.startswith('depth = "100 mm"') for line in draft(MANIFOLD).splitlines())


def test_a_draft_of_a_users_own_script_names_its_path():
    assert 'script = "parts/mine.py"' in draft(POPPET, script="parts/mine.py").splitlines()
