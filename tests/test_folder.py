"""The output folder: all of a run or nothing, and nothing of the user's own is touched."""

import hashlib
import json
import os
import random
import signal
import sys
import tempfile
import time
from pathlib import Path

import pytest

from wrywing.export import folder, moves, swap
from wrywing.export.folder import FolderError

resource = pytest.importorskip("resource")  # POSIX
OLD = {"a.dxf": b"old a", "b.svg": b"same", "c.pdf": b"old c"}
NEW = {"a.dxf": b"new a", "b.svg": b"same", "d.pdf": b"new d"}


def put(place, files, stamp="one"):
    records = [{"path": p, "format": p[-3:], "drawing": p[:-4], "hand": "right"} for p in files]
    folder.write(place, files, records, stamp=stamp)


@pytest.fixture(params=["exchange", "two renames", "moves"])
def way(request, monkeypatch, tmp_path):
    """Each way in which files come into a folder, whatever this platform can do."""
    if request.param == "two renames":
        monkeypatch.setattr(swap, "_exchange", lambda one, other: False)
    if request.param == "moves":
        monkeypatch.setattr(swap, "renew", lambda *_: False)
    return request.param


def seen(place):
    """Every file under `place` and what is in it, without the manifest."""
    found = {str(p.relative_to(place)): p.read_bytes() for p in Path(place).rglob("*") if p.is_file()}
    found.pop("manifest.json", None)
    return found


def test_manifest_says_what_was_written(tmp_path):
    out = tmp_path / "deep" / "out"
    put(out, OLD, stamp="3fa9")
    manifest = json.loads((out / "manifest.json").read_text())
    assert manifest["stamp"] == "3fa9"
    assert {f["path"]: f["sha256"] for f in manifest["files"]} == {
        name: hashlib.sha256(data).hexdigest() for name, data in OLD.items()
    }
    assert manifest["files"][0].keys() == {"path", "format", "drawing", "hand", "sha256"}
    assert seen(out) == OLD
    assert list(out.parent.iterdir()) == [out]


def test_next_run_replaces_its_own_and_leaves_the_users(tmp_path, way):
    tmp_path = tmp_path / "out"
    put(tmp_path, OLD)
    (tmp_path / "notes.txt").write_bytes(b"mine")
    (tmp_path / "c.pdf").write_bytes(b"old c, with my pencil marks")
    (tmp_path / "deep" / "er").mkdir(parents=True)
    (tmp_path / "deep" / "er" / "a.dxf").write_bytes(b"mine")
    (tmp_path / "there").symlink_to("nowhere")
    tmp_path.chmod(0o750)
    before = (tmp_path / "notes.txt").stat()
    put(tmp_path, NEW, stamp="two")
    mine = {"notes.txt": b"mine", "c.pdf": b"old c, with my pencil marks", "deep/er/a.dxf": b"mine"}
    assert seen(tmp_path) == NEW | mine
    assert (tmp_path / "there").readlink() == Path("nowhere")
    assert tmp_path.stat().st_mode & 0o777 == 0o750
    after = (tmp_path / "notes.txt").stat()
    assert (after.st_ino, after.st_mtime) == (before.st_ino, before.st_mtime)
    put(tmp_path, {})
    assert seen(tmp_path) == mine
    assert [p.name for p in tmp_path.parent.iterdir()] == ["out"]


@pytest.mark.parametrize("name", ["d.pdf", "a.dxf", "manifest.json"])
def test_a_file_of_the_users_own_is_not_written_over(tmp_path, name):
    put(tmp_path, OLD)
    (tmp_path / name).write_bytes(b"mine")
    before = seen(tmp_path)
    with pytest.raises(FolderError, match=r"^output folder [^\n]*: wanted to write \S+, got a file [^\n]*$"):
        put(tmp_path, NEW)
    assert seen(tmp_path) == before
    assert (tmp_path / name).read_bytes() == b"mine"


def test_a_link_of_the_users_own_is_not_written_through(tmp_path):
    (tmp_path / "target").write_bytes(b"mine")
    (tmp_path / "out").mkdir()
    (tmp_path / "out" / "a.dxf").symlink_to(tmp_path / "target")
    with pytest.raises(FolderError):
        put(tmp_path / "out", NEW)
    assert (tmp_path / "target").read_bytes() == b"mine"


@pytest.mark.parametrize("listed", ["../precious", "/tmp/precious"])
def test_a_manifest_cannot_reach_outside(tmp_path, listed):
    out = tmp_path / "out"
    put(out, OLD)
    (tmp_path / "precious").write_bytes(b"mine")
    sha = hashlib.sha256(b"mine").hexdigest()
    (out / "manifest.json").write_text(json.dumps({"stamp": "", "files": [{"path": listed, "sha256": sha}]}))
    put(out, {})
    assert (tmp_path / "precious").exists()


def test_a_file_in_place_of_the_folder(tmp_path):
    (tmp_path / "out").write_bytes(b"mine")
    for place in (tmp_path / "out", tmp_path / "out" / "deeper"):
        with pytest.raises(FolderError, match=r"wanted a folder.*, got a file"):
            put(place, NEW)
    assert seen(tmp_path) == {"out": b"mine"}


@pytest.mark.skipif(not Path("/proc/self").exists(), reason="needs a place where nobody may write")
def test_a_place_where_nobody_may_write():
    with pytest.raises(FolderError, match=r"^output folder /proc/wrywing/out: wanted to write there, got: [^\n]+$"):
        put(Path("/proc/wrywing/out"), NEW)


@pytest.mark.parametrize("there", [False, True])
def test_a_disk_that_takes_no_more(tmp_path, there):
    out = tmp_path / "new" / "out"
    if there:
        put(out, OLD)
    before = seen(tmp_path)
    soft, hard = resource.getrlimit(resource.RLIMIT_FSIZE)
    resource.setrlimit(resource.RLIMIT_FSIZE, (5000, hard))
    try:
        with pytest.raises(FolderError, match="wanted to write there, got: File too large"):
            put(out, NEW | {"e.pdf": bytes(6000)})
    finally:
        resource.setrlimit(resource.RLIMIT_FSIZE, (soft, hard))
    assert seen(tmp_path) == before
    assert (tmp_path / "new").exists() == there


def test_a_read_only_folder():
    with tempfile.TemporaryDirectory() as place:
        top, out = Path(place), Path(place) / "out"
        put(out, OLD)
        before = seen(out)
        out.chmod(0o555)
        top.chmod(0o777)
        if (child := os.fork()) == 0:
            if os.getuid() == 0:
                os.setuid(65534)  # somebody whom permissions stop
            try:
                put(out, NEW)
            except FolderError as fault:
                os._exit(0 if "wanted to write there, got: Permission denied" in str(fault) else 2)
            os._exit(1)
        assert os.waitstatus_to_exitcode(os.waitpid(child, 0)[1]) == 0
        assert seen(out) == before
        assert list(top.iterdir()) == [out]
        out.chmod(0o755)


def test_what_the_user_saves_meanwhile_comes_along(tmp_path, monkeypatch):
    out = tmp_path / "out"
    put(out, OLD)
    (out / "notes.txt").write_bytes(b"mine")
    fill = swap._fill

    def slowly(new, content):
        fill(new, content)
        (out / "later.txt").write_bytes(b"later")
        (out / "draft").write_bytes(b"mine, saved anew")
        (out / "draft").replace(out / "notes.txt")

    monkeypatch.setattr(swap, "_fill", slowly)
    put(out, NEW)
    assert seen(out) == NEW | {"notes.txt": b"mine, saved anew", "later.txt": b"later"}


@pytest.mark.skipif(sys.platform not in ("linux", "darwin"), reason="this platform takes two renames")
def test_this_platform_exchanges_in_one_step(tmp_path):
    for name in ("a", "b"):
        (tmp_path / name).mkdir()
        (tmp_path / name / name).touch()
    assert swap._exchange(tmp_path / "a", tmp_path / "b")
    assert (tmp_path / "a" / "b").exists()
    assert (tmp_path / "b" / "a").exists()
    assert not swap._exchange(tmp_path / "a", tmp_path / "c")


def test_the_current_folder_stays_the_current_one(tmp_path, monkeypatch):
    put(tmp_path / "out", OLD)
    monkeypatch.chdir(tmp_path / "out")
    put(Path(), NEW)
    assert seen(Path()) == NEW == seen(tmp_path / "out")


def test_a_folder_full_of_the_users_own_things_is_not_exchanged(tmp_path, monkeypatch):
    put(tmp_path / "out", OLD)
    before = (tmp_path / "out").stat().st_ino
    monkeypatch.setattr(swap, "_MOST", 4)
    put(tmp_path / "out", NEW)
    assert seen(tmp_path / "out") == NEW
    assert (tmp_path / "out").stat().st_ino == before


def test_the_root_of_a_disk_can_be_written_to(tmp_path, monkeypatch):
    monkeypatch.setattr(os.path, "ismount", lambda place: True)
    put(tmp_path, OLD)
    put(tmp_path, NEW)
    assert seen(tmp_path) == NEW
    swap.recover(Path(tmp_path.anchor))


def test_a_link_to_the_folder_stays_one(tmp_path):
    put(tmp_path / "out", OLD)
    (tmp_path / "link").symlink_to("out")
    put(tmp_path / "link", NEW)
    assert (tmp_path / "link").is_symlink()
    assert seen(tmp_path / "out") == NEW


def test_killed_thirty_times_the_folder_is_the_old_or_the_new_one(tmp_path, way):
    sets = [{f"{i}.pdf": bytes([65 + kind]) * (3000 * i) for i in range(1, 20 + 3 * kind)} for kind in (0, 1)]
    whole = [{**files, "notes.txt": b"mine"} for files in sets]
    out, dice, ends, end = tmp_path / "out", random.Random(6), set(), 0
    put(out, sets[0])
    (out / "notes.txt").write_bytes(b"mine")
    for _ in range(30):
        if (child := os.fork()) == 0:
            while True:
                end = 1 - end
                put(out, sets[end])
        time.sleep(dice.uniform(0.001, 0.05))
        os.kill(child, signal.SIGKILL)
        os.waitpid(child, 0)
        if way != "exchange":  # there is a moment between two renames, or moves, that the next run puts right
            swap.recover(out)
            moves.recover(out)
        end = whole.index(seen(out))
        listed = json.loads((out / "manifest.json").read_bytes())["files"]
        assert {f["path"] for f in listed} == sets[end].keys()
        ends.add(end)
    assert ends == {0, 1}
    put(out, sets[1])
    assert seen(out) == whole[1]
    assert [p.name for p in tmp_path.iterdir()] == ["out"]


MOVES = 8  # three old files and their manifest out, three new ones and theirs in


@pytest.mark.parametrize("stop", range(MOVES))
def test_a_move_that_fails_is_undone(tmp_path, monkeypatch, stop):
    monkeypatch.chdir(tmp_path)
    put(tmp_path, OLD)
    before = (tmp_path / "manifest.json").read_bytes()
    _fail_at(monkeypatch, stop, OSError(5, "Input/output error"))
    with pytest.raises(FolderError, match="Input/output error"):
        put(tmp_path, NEW, stamp="two")
    assert seen(tmp_path) == OLD
    assert (tmp_path / "manifest.json").read_bytes() == before


@pytest.mark.parametrize("stop", range(MOVES + 1))
def test_a_run_killed_between_two_moves_is_undone_by_the_next(tmp_path, monkeypatch, stop):
    monkeypatch.chdir(tmp_path)
    put(tmp_path, OLD)
    (tmp_path / "notes.txt").write_bytes(b"mine")
    if (child := os.fork()) == 0:
        _fail_at(monkeypatch, stop, None)
        put(tmp_path, NEW, stamp="two")
        os._exit(9)
    os.waitpid(child, 0)
    (tmp_path / "e.dxf").write_bytes(b"mine too")
    mine = {"notes.txt": b"mine", "e.dxf": b"mine too"}
    with pytest.raises(FolderError):
        put(tmp_path, {"e.dxf": b""})
    settled = {n: d for n, d in seen(tmp_path).items() if not n.startswith(".")}
    assert settled == mine | (OLD if stop < MOVES else NEW)
    (tmp_path / "e.dxf").unlink()
    put(tmp_path, NEW, stamp="three")
    assert seen(tmp_path) == NEW | {"notes.txt": b"mine"}


def _fail_at(monkeypatch, stop, error):
    """Let the move after `stop` good ones fail; without an error, kill the process there."""
    count = iter(range(1000))
    move = Path.replace

    def moved(self, target):
        if next(count) == stop:
            if error is None:
                os._exit(9)
            raise error
        return move(self, target)

    monkeypatch.setattr(Path, "replace", moved)
