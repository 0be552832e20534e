"""Shipped parts by name, own scripts by path, and the sentences for both when they are not there."""

import pytest

from fem_flow.errors import CaseError
from fem_flow.part.find import find_script, shipped


def test_shipped_parts_are_listed_in_order():
    names = shipped()
    assert {"manifold", "poppet_valve", "sudden_expansion"} <= set(names)
    assert names == sorted(names)


def test_every_shipped_part_is_found_by_name(tmp_path):
    for name in shipped():
        assert find_script(name, tmp_path).name == f"{name}.py"


def test_a_misspelt_part(tmp_path):
    with pytest.raises(CaseError) as caught:
        find_script("popet_valve", tmp_path)
    assert str(caught.value) == (
        '[part] script: there is no shipped part "popet_valve"; the shipped parts are'
        f" {', '.join(shipped())}; a script of your own is given by its path, ending in .py; did you mean poppet_valve?"
    )
    assert caught.value.reason == "unknown_part"
    assert caught.value.details["suggestion"] == "poppet_valve"


def test_a_name_like_nothing_gets_no_suggestion(tmp_path):
    with pytest.raises(CaseError) as caught:
        find_script("xyzzy", tmp_path)
    assert "did you mean" not in str(caught.value)


def test_an_own_script_named_without_its_ending(tmp_path):
    (tmp_path / "widget.py").touch()
    with pytest.raises(CaseError) as caught:
        find_script("widget", tmp_path)
    assert str(caught.value).endswith('; the script of your own is "widget.py"')


def test_a_path_counts_from_the_folder_of_the_case(tmp_path):
    (tmp_path / "parts").mkdir()
    (tmp_path / "parts" / "mine.py").touch()
    assert find_script("parts/mine.py", tmp_path) == (tmp_path / "parts" / "mine.py").resolve()
    assert find_script("../parts/mine.py", tmp_path / "parts") == (tmp_path / "parts" / "mine.py").resolve()


def test_a_missing_file_names_the_nearest_one(tmp_path):
    (tmp_path / "mine.py").touch()
    with pytest.raises(CaseError) as caught:
        find_script("mnie.py", tmp_path)
    assert str(caught.value) == (
        f'[part] script: there is no file "mnie.py" (looked for {tmp_path / "mnie.py"}); did you mean mine.py?'
    )
    assert caught.value.reason == "no_such_script"
