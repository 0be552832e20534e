"""What a script says of itself, and the sentence for each way in which it can be wrong."""

import pytest

from fem_flow.case.declaration import Parameter
from fem_flow.errors import GeometryError
from fem_flow.part.drawing import Drawing, declare_many
from fem_flow.part.find import find_script, shipped

GOOD = '''
"""A box.

  ____
 |____|
"""
from fem_flow import Parameter
unit = "mm"
parameters = {"n": Parameter(2, low=1), "long": Parameter("3 mm", says="length")}
sections = ["middle"]
def kind(p):
    return "planar" if p.n < 3 else "axisymmetric"
def ports(p):
    return [f"port_{k}" for k in range(p.n)]
def legs(p):
    return {"port_0": p.long}
def draw(p):
    pass
'''


def test_declaration_without_values(script):
    with Drawing(script(GOOD)) as drawing:
        declared = drawing.declare()
    assert (declared.name, declared.says, declared.unit) == ("own", "A box.", "mm")
    assert declared.sketch == "  ____\n |____|"
    assert declared.parameters == {"n": Parameter(2, low=1), "long": Parameter("3 mm", says="length")}
    assert declared.sections == ("middle",)
    assert (declared.kind, declared.ports, declared.legs) == (None, None, None)


def test_declaration_with_values(script):
    with Drawing(script(GOOD)) as drawing:
        two, three = (drawing.declare({"n": n, "long": 3.0}) for n in (2, 3))
    assert (two.kind, two.ports, two.legs) == ("planar", ("port_0", "port_1"), {"port_0": 3.0})
    assert (three.kind, len(three.ports)) == ("axisymmetric", 3)


def test_constants_are_known_without_values():
    with Drawing(find_script("poppet_valve", ".")) as drawing:
        declared = drawing.declare()
    assert (declared.kind, declared.ports) == ("axisymmetric", ("inlet", "outlet"))
    assert declared.legs is None


def test_all_shipped_declarations_at_once():
    names = shipped()
    found = declare_many([find_script(n, ".") for n in names])
    assert [d.name for d in found] == names
    assert all(d.says and d.sketch and d.parameters for d in found)
    assert all(p.says for d in found for p in d.parameters.values())


BAD = {
    'unit = "mm"\n': ('unit = "furlong"\n', "its unit 'furlong' is not known"),
    "def draw(p):\n    pass\n": ("", "it has no function draw(p)"),
    "def kind(p):\n    return": ("def kin(p):\n    return", 'it says no kind; write kind = "planar" or kind = "axisymmetric"'),
    "def ports(p):": ("def prts(p):", 'it says no ports; write for example ports = ["inlet", "outlet"]'),
    '"n": Parameter(2, low=1)': ('"n": 2', 'its parameter n must be a Parameter, for example Parameter("12 mm")'),
    '"n": ': ('"kind": ', "'kind' cannot name a parameter; reserved are script, file, unit, kind, inside"),
    '["middle"]': ('["axis"]', "'axis' cannot be one of its sections: the name is reserved for boundaries of that role"),
    '= ["middle"]': ('= ["a", "a"]', "its sections name 'a' twice"),
    '"planar" if p.n < 3 else "axisymmetric"': ('"flat"', "its kind is 'flat'; it must be \"planar\" or \"axisymmetric\""),
    '{"port_0": p.long}': ('{"oulet": 1}', "its legs name 'oulet', which is not one of its ports: port_0, port_1"),
}


@pytest.mark.parametrize("old", BAD)
def test_a_wrong_declaration_is_one_sentence(script, old):
    assert old in GOOD
    new, sentence = BAD[old]
    with Drawing(script(GOOD.replace(old, new))) as drawing, pytest.raises(GeometryError) as caught:
        drawing.declare({"n": 2, "long": 3.0})
    assert str(caught.value).startswith(f"the script own.py cannot be used: {sentence}")
    assert caught.value.reason == "bad_script"


FAILURES = {
    "1 / 0": "the script own.py failed in line 7: ZeroDivisionError: division by zero",
    "p.bor": "the script own.py failed in line 7: AttributeError: 'types.SimpleNamespace' object has no attribute 'bor'",
    "raise SystemExit(3)": "the script own.py failed in line 7: SystemExit: 3",
    "draw(p)": "the script own.py failed in line 7: RecursionError: maximum recursion depth exceeded",
    "gmsh.model.occ.addDisk(0, 0, 0, -1, 1)": "the script own.py failed in line 7: Exception: ",
    "float('x y')": "the script own.py failed",
}


@pytest.mark.parametrize("line", FAILURES)
def test_a_failing_script_is_named_with_its_line(script, line):
    path = script(f'import gmsh\nkind = "planar"\nunit = "mm"\nports = []\n\ndef draw(p):\n    {line}\n')
    with Drawing(path) as drawing, pytest.raises(GeometryError) as caught:
        drawing.draw({})
    if line == "float('x y')":  # a ValueError raised by the script itself is the user's own sentence
        assert str(caught.value) == "could not convert string to float: 'x y'"
    else:
        assert str(caught.value).startswith(FAILURES[line])
        assert caught.value.reason == "script_failed"


def test_a_value_error_of_the_script_is_its_sentence(script):
    text = 'kind = "planar"\nunit = "mm"\nports = []\ndef draw(p):\n    raise ValueError("the lid is too small; raise lid")\n'
    with Drawing(script(text)) as drawing, pytest.raises(GeometryError) as caught:
        drawing.draw({})
    assert str(caught.value) == "the lid is too small; raise lid"
    assert caught.value.reason == "impossible_dimensions"


def test_a_syntax_error_is_named_with_its_line(script):
    with Drawing(script('unit = "mm"\nkind = \n')) as drawing, pytest.raises(GeometryError) as caught:
        drawing.declare()
    assert str(caught.value) == "the script own.py failed in line 2: SyntaxError: invalid syntax (own.py, line 2)"


def test_a_script_may_import_its_neighbours_and_they_are_read_anew(script, tmp_path):
    helper = tmp_path / "helper.py"
    path = script('from helper import unit\nkind = "planar"\nports = []\ndef draw(p): pass\n')
    with Drawing(path) as drawing:
        for unit in ("mm", "cm"):
            helper.write_text(f'unit = "{unit}"\n')
            assert drawing.declare().unit == unit
            for cached in (tmp_path / "__pycache__").glob("*"):
                cached.unlink()


def test_dataclasses_work_in_a_script(script):
    text = """
    from __future__ import annotations
    from dataclasses import dataclass
    @dataclass
    class Hole:
        x: float
    kind = "planar"
    unit = "mm"
    ports = []
    def draw(p): pass
    """
    with Drawing(script(text)) as drawing:
        assert drawing.declare().kind == "planar"
