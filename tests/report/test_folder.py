"""The result folder: whichever moment a run is killed at, one whole result stands there."""

import os
import random
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

from fieldfit.report import folder
from fieldfit.report.folder import replace_folder

FOREVER = """
import sys
from pathlib import Path
from fieldfit.report.folder import replace_folder
number = int(sys.argv[2])
while True:
    number += 1
    content = f"{number}\\n" * 2000
    files = {name: content for name in ("a.txt", "b.txt", "figures/c.svg", "figures/d.png")}
    replace_folder(Path(sys.argv[1]), {"results.json": '{"fieldfit": 1}', **files})
    print(number, flush=True)
"""


def whole(out: Path) -> int:
    """The number of the run whose result stands there, every file of it whole."""
    texts = {(out / name).read_text() for name in ("a.txt", "b.txt", "figures/c.svg", "figures/d.png")}
    (text,) = texts
    lines = text.splitlines()
    assert len(lines) == 2000
    (number,) = set(lines)
    return int(number)


@pytest.mark.skipif(sys.platform != "linux", reason="folders change places in one step on Linux only")
def test_a_run_killed_at_any_moment_leaves_one_whole_result(tmp_path: Path) -> None:
    out, wait, number = tmp_path / "out", random.Random(1), 0
    for _ in range(12):
        command = [sys.executable, "-c", FOREVER, str(out), str(number)]
        process = subprocess.Popen(command, stdout=subprocess.PIPE)
        assert process.stdout is not None
        process.stdout.readline()  # past its start, and past its first result
        time.sleep(0.1 * wait.random())
        os.kill(process.pid, signal.SIGKILL)
        process.communicate()
        assert whole(out) > number
        number = whole(out)
    replace_folder(out, {"results.json": "{}"})
    assert [path.name for path in tmp_path.iterdir()] == ["out"]


def test_without_the_one_step_an_old_result_is_moved_aside_and_cleared(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(folder, "_exchanged", lambda *_: False)
    for content in ("1", "2"):
        replace_folder(tmp_path / "out", {"results.json": '{"fieldfit": 1}', "a.txt": content})
    assert (tmp_path / "out" / "a.txt").read_text() == "2"
    assert [path.name for path in tmp_path.iterdir()] == ["out"]


def test_what_a_run_killed_between_two_steps_left_beside_is_put_back(tmp_path: Path) -> None:
    gone = subprocess.Popen([sys.executable, "-c", ""])
    gone.wait()
    left = tmp_path / f".out.fieldfit-{gone.pid}-x"
    (left / "old").mkdir(parents=True)
    (left / "old" / "mine.txt").write_text("kept")
    with pytest.raises(folder.OutputError, match="did not write"):  # put back, and then seen not to be fieldfit's
        replace_folder(tmp_path / "out", {"results.json": "{}"})
    assert (tmp_path / "out" / "mine.txt").read_text() == "kept"
    assert not left.exists()


def test_what_a_running_process_has_beside_is_left_alone(tmp_path: Path) -> None:
    left = tmp_path / f".out.fieldfit-{os.getpid()}-x"
    left.mkdir()
    replace_folder(tmp_path / "out", {"results.json": "{}"})
    assert left.exists()
