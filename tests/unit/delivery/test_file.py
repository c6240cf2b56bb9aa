"""Digests as files."""

import os
import resource
import stat

import pytest

from vanner.delivery import write_digest
from vanner.errors import DeliveryError

SLOT = "2026-03-04T07:00"


def write(folder, desk="metro", slot=SLOT, text="Quiet.\n", html="<p>Quiet.</p>\n"):
    return write_digest(folder, desk, slot, "[metro] Digest", text, html)


def names(folder):
    return sorted(path.name for path in folder.iterdir())


def test_text_and_html_are_named_after_desk_and_slot(tmp_path):
    path = write(tmp_path)
    assert path == tmp_path / "metro-2026-03-04-0700.txt"
    assert names(tmp_path) == ["metro-2026-03-04-0700.html", "metro-2026-03-04-0700.txt"]
    assert path.read_text() == "[metro] Digest\n\nQuiet.\n"
    assert path.with_suffix(".html").read_text() == "<p>Quiet.</p>\n"


def test_a_folder_that_is_missing_is_made(tmp_path):
    assert write(tmp_path / "a" / "b").is_file()


def test_writing_twice_gives_the_same_files(tmp_path):
    first = write(tmp_path).read_bytes()
    assert write(tmp_path).read_bytes() == first
    assert len(names(tmp_path)) == 2


def test_what_a_crash_left_half_written_is_cleared_by_the_next_try(tmp_path):
    (tmp_path / ".metro-2026-03-04-0700.txt.part").write_text("hal")
    write(tmp_path)
    assert names(tmp_path) == ["metro-2026-03-04-0700.html", "metro-2026-03-04-0700.txt"]


def test_files_are_as_readable_as_others_of_the_same_user(tmp_path):
    other = tmp_path / "other"
    other.touch()
    modes = {stat.S_IMODE(path.stat().st_mode) for path in (other, write(tmp_path))}
    assert len(modes) == 1


def test_a_desk_cannot_name_a_file_outside_the_folder(tmp_path):
    folder = tmp_path / "digests"
    write(folder, desk="../../etc/Desk: 1")
    assert names(tmp_path) == ["digests"]
    assert all(name.startswith("etc-desk-1-") for name in names(folder))


def test_desks_whose_names_differ_in_case_only_have_files_of_their_own(tmp_path):
    assert write(tmp_path, desk="metro") != write(tmp_path, desk="Metro")


def test_a_slot_that_is_no_time_is_an_error(tmp_path):
    with pytest.raises(ValueError, match="isoformat"):
        write(tmp_path, slot="../../x")


def test_text_beyond_ascii_and_a_lone_surrogate_are_written(tmp_path):
    assert write(tmp_path, text="港 \ud800\n").read_text(encoding="utf-8").endswith("港 ?\n")


def test_a_folder_below_a_file_is_told_and_not_final(tmp_path):
    (tmp_path / "taken").touch()
    with pytest.raises(DeliveryError, match="metro-2026-03-04-0700") as caught:
        write(tmp_path / "taken" / "digests")
    assert not caught.value.final


@pytest.mark.skipif(os.geteuid() == 0, reason="root may write everywhere")
def test_a_folder_without_the_right_to_write_is_told_and_not_final(tmp_path):
    tmp_path.chmod(0o500)
    with pytest.raises(DeliveryError, match="let Vanner write") as caught:
        write(tmp_path)
    assert not caught.value.final


def test_running_out_of_room_leaves_the_earlier_file_and_no_rest(tmp_path):
    write(tmp_path)
    _, hard = before = resource.getrlimit(resource.RLIMIT_FSIZE)
    try:
        # The system refuses to let any file grow beyond this, as a full disk would.
        resource.setrlimit(resource.RLIMIT_FSIZE, (4096, hard))
        with pytest.raises(DeliveryError, match="room") as caught:
            write(tmp_path, text="x" * 10_000, html="<p>New.</p>\n")
    finally:
        resource.setrlimit(resource.RLIMIT_FSIZE, before)
    assert not caught.value.final
    assert (tmp_path / "metro-2026-03-04-0700.txt").read_text().endswith("Quiet.\n")
    assert names(tmp_path) == ["metro-2026-03-04-0700.html", "metro-2026-03-04-0700.txt"]
