"""Files are whole or untouched."""

import errno
import os
import stat
import subprocess
import sys
import threading

import pytest

from drc_power.faults import InputError
from drc_power.report import write
from drc_power.report.write import write_file, write_files

posix = pytest.mark.skipif(os.name != "posix", reason="permissions and devices of POSIX")


def _names(folder):
    return sorted(os.listdir(folder))


def test_a_new_file_and_a_replaced_one(tmp_path):
    path = tmp_path / "out.json"
    write_file(str(path), "one µ\n")
    write_file(str(path), "two\n")
    assert path.read_bytes() == b"two\n"
    assert _names(tmp_path) == ["out.json"]


@posix
def test_permissions_of_an_old_file_stay_and_a_new_one_follows_the_umask(tmp_path):
    old, new = tmp_path / "old", tmp_path / "new"
    old.write_text("x")
    old.chmod(0o640)
    before = os.umask(0o027)
    try:
        write_files({str(old): "1", str(new): "2"})
    finally:
        os.umask(before)
    assert stat.S_IMODE(old.stat().st_mode) == 0o640
    assert stat.S_IMODE(new.stat().st_mode) == 0o640


@posix
def test_a_symbolic_link_stays_and_its_target_is_replaced(tmp_path):
    (tmp_path / "real").mkdir()
    target, link = tmp_path / "real" / "out.json", tmp_path / "link.json"
    target.write_text("old")
    link.symlink_to(target)
    write_file(str(link), "new")
    assert link.is_symlink()
    assert target.read_text() == "new"
    assert _names(tmp_path / "real") == ["out.json"]


@posix
def test_a_link_to_nothing_makes_its_target(tmp_path):
    (tmp_path / "link").symlink_to(tmp_path / "target")
    write_file(str(tmp_path / "link"), "new")
    assert (tmp_path / "target").read_text() == "new"


@posix
def test_a_link_in_a_circle_is_refused(tmp_path):
    (tmp_path / "a").symlink_to(tmp_path / "b")
    (tmp_path / "b").symlink_to(tmp_path / "a")
    with pytest.raises(InputError, match="cannot be written"):
        write_file(str(tmp_path / "a"), "new")
    assert (tmp_path / "a").is_symlink()


@pytest.mark.parametrize(
    ("name", "said"),
    [("missing/out.json", "no such file"), ("file/out.json", "not a directory"), ("folder", "folder"), ("a\0b", "null")],
)
def test_what_cannot_be_written_is_one_sentence_that_names_the_path(tmp_path, name, said):
    (tmp_path / "file").write_text("x")
    (tmp_path / "folder").mkdir()
    path = f"{tmp_path}/{name}"
    with pytest.raises(InputError) as refusal:
        write_file(path, "new")
    assert said in str(refusal.value)
    assert "name a file in a folder that exists" in str(refusal.value)
    assert _names(tmp_path) == ["file", "folder"]


@pytest.fixture
def old_file(tmp_path):
    path = tmp_path / "out.json"
    path.write_text("good")
    return path


@pytest.mark.parametrize("step", ["fsync", "replace", "chmod"])
def test_a_failure_half_way_leaves_the_old_file_and_no_litter(monkeypatch, old_file, step):
    def fail(*_):
        raise OSError(errno.ENOSPC, "No space left on device")

    monkeypatch.setattr(write.os, step, fail)
    with pytest.raises(InputError, match="no space left on device"):
        write_file(str(old_file), "new")
    assert old_file.read_text() == "good"
    assert _names(old_file.parent) == ["out.json"]


def test_the_text_is_on_the_disk_in_full_before_it_takes_the_old_ones_place(monkeypatch, old_file):
    synced = []
    monkeypatch.setattr(write.os, "fsync", lambda handle: synced.append(os.fstat(handle).st_size))
    write_file(str(old_file), "new µ")
    assert synced == [6]


def test_an_interruption_half_way_leaves_the_old_file_and_no_litter(monkeypatch, old_file):
    def interrupt(*_):
        raise KeyboardInterrupt

    monkeypatch.setattr(write.os, "fsync", interrupt)
    with pytest.raises(KeyboardInterrupt):
        write_file(str(old_file), "new")
    assert old_file.read_text() == "good"
    assert _names(old_file.parent) == ["out.json"]


@posix
def test_a_process_killed_while_writing_leaves_the_old_file(old_file):
    program = (
        "import os, signal, sys\n"
        "from drc_power.report import write\n"
        "write.os.fsync = lambda _: os.kill(os.getpid(), signal.SIGKILL)\n"
        "write.write_file(sys.argv[1], 'new' * 100_000)\n"
    )
    done = subprocess.run([sys.executable, "-c", program, str(old_file)], check=False)
    assert done.returncode < 0
    assert old_file.read_text() == "good"


def test_where_one_of_several_cannot_be_written_none_is(tmp_path, old_file):
    with pytest.raises(InputError, match=r"missing.*no such file"):
        write_files({str(old_file): "new", str(tmp_path / "missing" / "b"): "new"})
    assert old_file.read_text() == "good"
    assert _names(tmp_path) == ["out.json"]


def test_two_outputs_in_one_file_are_refused(tmp_path):
    with pytest.raises(InputError, match="written twice"):
        write_files({f"{tmp_path}/a": "1", f"{tmp_path}/./a": "2"})
    assert _names(tmp_path) == []


def test_a_reader_sees_the_old_or_the_new_text_and_never_a_part(old_file):
    old_file.write_text("a" * 200_000)
    seen, stop = set(), threading.Event()

    def read():
        while not stop.is_set():
            text = old_file.read_text()
            seen.add((len(text), text[:1], text[-1:]))

    reader = threading.Thread(target=read)
    reader.start()
    try:
        for letter in "bcdefghijklmnopqrst":
            write_file(str(old_file), letter * 200_000)
    finally:
        stop.set()
        reader.join()
    assert all(length == 200_000 and first == last for length, first, last in seen)


@posix
@pytest.mark.skipif(not os.path.exists("/dev/full"), reason="needs /dev/full")
def test_devices_are_written_straight_and_stay_devices(old_file):
    write_file("/dev/null", "x")
    assert stat.S_ISCHR(os.stat("/dev/null").st_mode)
    with pytest.raises(InputError, match="no space left"):
        write_files({str(old_file): "new", "/dev/full": "x" * 100_000})
    assert old_file.read_text() == "good"


@posix
@pytest.mark.skipif(hasattr(os, "geteuid") and os.geteuid() == 0, reason="nothing is forbidden to root")
def test_a_folder_that_may_not_be_written_to(tmp_path, old_file):
    tmp_path.chmod(0o500)
    try:
        with pytest.raises(InputError, match="permission denied"):
            write_file(str(old_file), "new")
    finally:
        tmp_path.chmod(0o700)
    assert old_file.read_text() == "good"
