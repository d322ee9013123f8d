"""The output folder: all of a run or nothing, and nothing of the user's own is touched."""

import hashlib
import json
import os
from pathlib import Path

import pytest

from wrywing.export import folder
from wrywing.export.folder import FolderError

resource = pytest.importorskip("resource")  # POSIX
OLD = {"a.dxf": b"old a", "b.svg": b"same", "c.pdf": b"old c"}
NEW = {"a.dxf": b"new a", "b.svg": b"same", "d.pdf": b"new d"}


def put(place, files, stamp="one"):
    records = [{"path": p, "format": p[-3:], "drawing": p[:-4], "hand": "right"} for p in files]
    folder.write(place, files, records, stamp=stamp)


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


def test_next_run_replaces_its_own_and_leaves_the_users(tmp_path):
    put(tmp_path, OLD)
    (tmp_path / "notes.txt").write_bytes(b"mine")
    (tmp_path / "c.pdf").write_bytes(b"old c, with my pencil marks")
    put(tmp_path, NEW, stamp="two")
    assert seen(tmp_path) == NEW | {"notes.txt": b"mine", "c.pdf": b"old c, with my pencil marks"}
    put(tmp_path, {})
    assert set(seen(tmp_path)) == {"notes.txt", "c.pdf"}


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


MOVES = 8  # three old files and their manifest out, three new ones and theirs in


@pytest.mark.parametrize("stop", range(MOVES))
def test_a_move_that_fails_is_undone(tmp_path, monkeypatch, stop):
    put(tmp_path, OLD)
    before = (tmp_path / "manifest.json").read_bytes()
    _fail_at(monkeypatch, stop, OSError(5, "Input/output error"))
    with pytest.raises(FolderError, match="Input/output error"):
        put(tmp_path, NEW, stamp="two")
    assert seen(tmp_path) == OLD
    assert (tmp_path / "manifest.json").read_bytes() == before


@pytest.mark.parametrize("stop", range(MOVES + 1))
def test_a_run_killed_between_two_moves_is_undone_by_the_next(tmp_path, monkeypatch, stop):
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
