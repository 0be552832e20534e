import json
import os
import signal
import subprocess
import sys
import time

import pytest

from fem_flow.errors import CaseError
from fem_flow.show.folder import check_folder, is_ours, result_folder

RESULT = json.dumps({"schema": "fem_flow.result/1"})


def write(folder, text=RESULT, name="result.json"):
    with result_folder(folder) as place:
        (place / name).write_text(text)


def write_half(folder, error):
    with result_folder(folder) as place:
        (place / "result.json").write_text("half")
        raise error


def names(folder):
    return sorted(p.name for p in folder.iterdir())


def refusal(folder):
    with pytest.raises(CaseError) as caught:
        check_folder(folder)
    with pytest.raises(CaseError) as again:
        write(folder)
    assert str(again.value) == str(caught.value)
    return str(caught.value), caught.value.reason


def test_a_new_folder_appears_with_its_parents(tmp_path):
    write(tmp_path / "a" / "b")
    assert names(tmp_path / "a") == ["b"]
    assert names(tmp_path / "a" / "b") == ["result.json"]
    assert is_ours(tmp_path / "a" / "b")


def test_the_folder_is_open_to_those_whom_the_umask_lets_in(tmp_path):
    (tmp_path / "plain").mkdir()
    write(tmp_path / "result")
    assert (tmp_path / "result").stat().st_mode == (tmp_path / "plain").stat().st_mode


def test_an_empty_folder_is_taken(tmp_path):
    (tmp_path / "result").mkdir()
    write(tmp_path / "result")
    assert names(tmp_path) == ["result"]
    assert names(tmp_path / "result") == ["result.json"]


def test_an_old_result_is_replaced_and_what_others_put_there_is_kept(tmp_path):
    folder = tmp_path / "result"
    with result_folder(folder) as place:
        (place / "result.json").write_text(RESULT)
        (place / "pictures").mkdir()
        (place / "pictures" / "old.png").write_text("old")
    (folder / "notes.txt").write_text("mine")
    (folder / "more").mkdir()
    (folder / "more" / "deep.txt").write_text("mine too")
    with result_folder(folder) as place:
        (place / "result.json").write_text(RESULT + "\n")
        (place / "pictures").mkdir()
        (place / "pictures" / "new.png").write_text("new")
    assert names(tmp_path) == ["result"]
    assert names(folder) == ["more", "notes.txt", "pictures", "result.json"]
    assert names(folder / "pictures") == ["new.png"]
    assert (folder / "result.json").read_text() == RESULT + "\n"
    assert (folder / "notes.txt").read_text() == "mine"
    assert (folder / "more" / "deep.txt").read_text() == "mine too"


@pytest.mark.parametrize("name", ["result.json", "preview.json", "notes.txt"])
def test_a_folder_of_somebody_else_is_refused_and_left_alone(tmp_path, name):
    folder = tmp_path / "theirs"
    folder.mkdir()
    (folder / name).write_text('{"schema": "another/1"}')
    sentence = f"{folder} exists and is no result of fem-flow; name another folder with -o, or remove it"
    assert refusal(folder) == (sentence, "folder_in_use")
    assert names(tmp_path) == ["theirs"]
    assert names(folder) == [name]


@pytest.mark.parametrize("text", ["[]", "not json", "", '{"schema": 3}', '{"schema": "fem_flow.preview/1"}'])
def test_a_file_called_result_json_is_not_enough(tmp_path, text):
    (tmp_path / "result.json").write_text(text)
    assert not is_ours(tmp_path)


def test_a_preview_is_ours(tmp_path):
    (tmp_path / "preview.json").write_text('{"schema": "fem_flow.preview/1"}')
    assert is_ours(tmp_path)


def test_a_file_in_the_way_is_refused(tmp_path):
    (tmp_path / "case").write_text("")
    sentence = f"{tmp_path / 'case'} is a file, so no result folder can be made there; name a folder with -o"
    assert refusal(tmp_path / "case") == (sentence, "folder_in_use")


def test_a_folder_that_cannot_be_made_is_refused(tmp_path):
    (tmp_path / "file").write_text("")
    sentence, reason = refusal(tmp_path / "file" / "result")
    file = tmp_path / "file"
    assert sentence == f"{file / 'result'} cannot be written ({file} is a file); name another folder with -o"
    assert reason == "folder_not_writable"


def test_a_closed_folder_is_refused(tmp_path, monkeypatch):
    monkeypatch.setattr(os, "access", lambda path, how: False)  # root, who may run this test, is let in everywhere
    sentence = f"{tmp_path / 'a' / 'b'} cannot be written ({tmp_path} may not be written to); name another folder with -o"
    assert refusal(tmp_path / "a" / "b") == (sentence, "folder_not_writable")


def test_checking_makes_nothing(tmp_path):
    check_folder(tmp_path / "a" / "b")
    assert names(tmp_path) == []


@pytest.mark.parametrize("error", [ValueError, KeyboardInterrupt, SystemExit])
def test_whatever_goes_wrong_leaves_the_old_result(tmp_path, error):
    write(tmp_path / "result")
    with pytest.raises(error):
        write_half(tmp_path / "result", error)
    assert names(tmp_path) == ["result"]
    assert (tmp_path / "result" / "result.json").read_text() == RESULT


def test_an_interruption_between_the_two_renames_brings_the_old_result_back(tmp_path, monkeypatch):
    folder = tmp_path / "result"
    write(folder)
    rename = type(folder).rename

    def interrupted(self, target):
        if "unfinished" in self.name:
            raise KeyboardInterrupt
        return rename(self, target)

    monkeypatch.setattr(type(folder), "rename", interrupted)
    with pytest.raises(KeyboardInterrupt):
        write(folder, "new")
    assert names(tmp_path) == ["result"]
    assert (folder / "result.json").read_text() == RESULT


KILLED = """
import sys, time
from pathlib import Path
from fem_flow.show.folder import result_folder
with result_folder(Path(sys.argv[1])) as place:
    (place / "result.json").write_text("half")
    print("writing", flush=True)
    time.sleep(60)
"""


@pytest.mark.skipif(os.name != "posix", reason="signals are those of posix")
@pytest.mark.parametrize(("number", "left"), [(signal.SIGINT, 0), (signal.SIGKILL, 1)])
def test_a_killed_process_leaves_the_old_result_and_the_next_run_tidies_up(tmp_path, number, left):
    folder = tmp_path / "result"
    write(folder)
    command = [sys.executable, "-c", KILLED, str(folder)]
    with subprocess.Popen(command, stdout=subprocess.PIPE, stderr=subprocess.DEVNULL, text=True) as process:
        try:
            assert process.stdout.readline() == "writing\n"
            process.send_signal(number)
            assert process.wait(timeout=10) != 0
        finally:
            process.kill()
    unfinished = [name for name in names(tmp_path) if name.startswith("result.fem_flow-unfinished-")]
    assert len(unfinished) == left
    assert len(names(tmp_path)) == 1 + left
    assert (folder / "result.json").read_text() == RESULT
    write(folder, RESULT + "\n")
    assert names(tmp_path) == ["result"]
    assert (folder / "result.json").read_text() == RESULT + "\n"


def dead_process():
    process = subprocess.Popen([sys.executable, "-c", ""])
    process.wait()
    time.sleep(0.01)
    return process.pid


@pytest.mark.skipif(os.name != "posix", reason="whether a process lives can be asked on posix")
def test_a_result_that_was_moved_but_not_replaced_comes_back_first(tmp_path):
    moved = tmp_path / f"result.fem_flow-replaced-{dead_process()}-0"
    moved.mkdir()
    (moved / "result.json").write_text(RESULT)
    with pytest.raises(ValueError, match="stopped"), result_folder(tmp_path / "result"):
        raise ValueError("stopped")
    assert names(tmp_path) == ["result"]
    assert (tmp_path / "result" / "result.json").read_text() == RESULT


def test_the_unfinished_folder_of_a_living_process_is_left_alone(tmp_path):
    with result_folder(tmp_path / "result") as place:
        write(tmp_path / "result")
        assert place.is_dir()
        (place / "result.json").write_text(RESULT + "\n")
    assert (tmp_path / "result" / "result.json").read_text() == RESULT + "\n"
    assert names(tmp_path) == ["result"]


def test_other_folders_with_a_similar_name_are_left_alone(tmp_path):
    for name in ("result.fem_flow-unfinished-mine", "result-2"):
        (tmp_path / name).mkdir()
    write(tmp_path / "result")
    assert names(tmp_path) == ["result", "result-2", "result.fem_flow-unfinished-mine"]


@pytest.mark.skipif(os.name != "posix", reason="symbolic links")
def test_a_link_to_a_folder_stays_a_link(tmp_path):
    write(tmp_path / "real")
    (tmp_path / "link").symlink_to(tmp_path / "real")
    write(tmp_path / "link", RESULT + "\n")
    assert (tmp_path / "link").is_symlink()
    assert (tmp_path / "real" / "result.json").read_text() == RESULT + "\n"
