"""Folders and files that appear whole or not at all."""

from __future__ import annotations

import errno
import os
import stat
from pathlib import Path

import pytest

from outputs import package
from outputs.package import staged, write_file
from profiles.errors import FormatError, WriteError


def anything(folder: Path) -> bool:
    return True


def nothing(folder: Path) -> bool:
    return False


def put(folder: Path, text: str, *, replace: bool = False, same: bool = False) -> None:
    with staged(folder, replace=replace, same_package=anything if same else nothing) as stage:
        write_file(stage / "job.toml", text)
        write_file(stage / "proof.json", text)


def names(folder: Path) -> list[str]:
    return sorted(entry.name for entry in folder.iterdir())


def text(folder: Path) -> str:
    assert names(folder) == ["job.toml", "proof.json"]
    return (folder / "job.toml").read_text(encoding="utf-8")


class TestPlaces:
    def test_an_absent_folder_is_made(self, tmp_path: Path) -> None:
        put(tmp_path / "pack", "new")
        assert text(tmp_path / "pack") == "new"
        assert names(tmp_path) == ["pack"]

    def test_an_empty_folder_is_taken(self, tmp_path: Path) -> None:
        (tmp_path / "pack").mkdir()
        put(tmp_path / "pack", "new")
        assert text(tmp_path / "pack") == "new"
        assert names(tmp_path) == ["pack"]

    def test_parents_are_made(self, tmp_path: Path) -> None:
        put(tmp_path / "a" / "b" / "c", "new")
        assert text(tmp_path / "a" / "b" / "c") == "new"

    def test_the_stage_is_empty_and_on_the_same_file_system(self, tmp_path: Path) -> None:
        with staged(tmp_path / "pack", replace=False, same_package=nothing) as stage:
            assert names(stage) == []
            assert stage.parent == tmp_path
            assert not (tmp_path / "pack").exists()

    def test_the_folder_is_as_open_as_any_other(self, tmp_path: Path) -> None:
        put(tmp_path / "pack", "new")
        (tmp_path / "usual").mkdir()
        (tmp_path / "usual" / "file").write_text("", encoding="utf-8")
        assert (tmp_path / "pack").stat().st_mode == (tmp_path / "usual").stat().st_mode
        assert (tmp_path / "pack" / "job.toml").stat().st_mode == (tmp_path / "usual" / "file").stat().st_mode

    def test_the_same_package_is_rewritten(self, tmp_path: Path) -> None:
        put(tmp_path / "pack", "old")
        put(tmp_path / "pack", "new", same=True)
        assert text(tmp_path / "pack") == "new"
        assert names(tmp_path) == ["pack"]

    def test_same_package_is_asked_of_the_folder(self, tmp_path: Path) -> None:
        put(tmp_path / "pack", "old")
        asked: list[Path] = []
        with staged(tmp_path / "pack", replace=False, same_package=lambda folder: not asked.append(folder)) as stage:
            write_file(stage / "job.toml", "new")
        assert asked == [tmp_path / "pack"]

    def test_a_relative_name_is_one_in_the_folder_one_works_in(
        self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
    ) -> None:
        monkeypatch.chdir(tmp_path)
        put(Path("pack"), "new")
        assert text(tmp_path / "pack") == "new"

    def test_the_empty_folder_one_works_in_is_filled_and_stays(
        self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
    ) -> None:
        (tmp_path / "pack").mkdir()
        monkeypatch.chdir(tmp_path / "pack")
        inode = Path().stat().st_ino
        put(Path(), "new")
        assert (text(tmp_path / "pack"), Path().stat().st_ino) == ("new", inode)
        assert names(tmp_path) == ["pack"]

    def test_leftovers_of_a_killed_run_do_not_block(self, tmp_path: Path) -> None:
        (tmp_path / ".dishwright-0123456789ab.partial").mkdir()
        put(tmp_path / "pack", "new")
        assert text(tmp_path / "pack") == "new"


class TestReplacing:
    def test_what_is_replaced_stays_as_previous(self, tmp_path: Path) -> None:
        put(tmp_path / "pack", "old")
        put(tmp_path / "pack", "new", replace=True)
        assert text(tmp_path / "pack") == "new"
        assert text(tmp_path / "pack.previous") == "old"
        assert names(tmp_path) == ["pack", "pack.previous"]

    def test_even_the_same_package_stays_when_replacing_is_asked_for(self, tmp_path: Path) -> None:
        put(tmp_path / "pack", "old")
        put(tmp_path / "pack", "new", replace=True, same=True)
        assert text(tmp_path / "pack.previous") == "old"

    def test_an_older_previous_makes_way(self, tmp_path: Path) -> None:
        for content in ("first", "second", "third"):
            put(tmp_path / "pack", content, replace=True)
        assert text(tmp_path / "pack") == "third"
        assert text(tmp_path / "pack.previous") == "second"
        assert names(tmp_path) == ["pack", "pack.previous"]

    @pytest.mark.parametrize("entry", ["notes.txt", "photos/"])
    def test_a_previous_of_somebody_s_own_is_not_removed(self, tmp_path: Path, entry: str) -> None:
        put(tmp_path / "pack", "old")
        own = tmp_path / "pack.previous" / entry
        own.parent.mkdir()
        own.mkdir() if entry.endswith("/") else own.write_text("mine", encoding="utf-8")
        with pytest.raises(WriteError, match=rf"pack\.previous: holds {own.name}, .* allowed: .*; do: move it away"):
            put(tmp_path / "pack", "new", replace=True)
        assert text(tmp_path / "pack") == "old"
        assert own.exists()
        assert names(tmp_path) == ["pack", "pack.previous"]

    def test_a_previous_that_is_a_file_is_refused_at_once(self, tmp_path: Path) -> None:
        put(tmp_path / "pack", "old")
        (tmp_path / "pack.previous").write_text("mine", encoding="utf-8")
        with (
            pytest.raises(WriteError, match=r"pack\.previous: is a file or a link; allowed: .*; do: move it away"),
            staged(tmp_path / "pack", replace=True, same_package=nothing),
        ):
            pytest.fail("the body must not run")

    @pytest.mark.parametrize("with_previous", [False, True])
    @pytest.mark.parametrize("failing", [1, 2, 3])
    def test_the_old_package_is_whole_at_one_of_both_names_at_every_moment(
        self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, failing: int, *, with_previous: bool
    ) -> None:
        place = tmp_path / "pack"
        if with_previous:
            put(place, "older", replace=True)
        put(place, "old", replace=True)
        rename, calls = Path.rename, [0]

        def watched(self: Path, target: Path) -> Path:
            calls[0] += 1
            if calls[0] == failing:
                raise OSError(errno.EIO, "Input/output error")
            moved = rename(self, target)
            assert "old" in [text(folder) for folder in (place, tmp_path / "pack.previous") if folder.exists()]
            return moved

        monkeypatch.setattr(Path, "rename", watched)
        if failing <= 2 + with_previous:
            with pytest.raises(WriteError, match=r"pack: cannot be written \(Input/output error\)"):
                put(place, "new", replace=True)
            assert text(place) == "old"
            assert names(tmp_path) == (["pack", "pack.previous"] if with_previous else ["pack"])
        else:
            put(place, "new", replace=True)
            assert text(tmp_path / "pack.previous") == "old"

    def test_an_exchange_of_the_same_package_that_fails_is_undone(
        self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
    ) -> None:
        put(tmp_path / "pack", "old")
        rename = Path.rename

        def failing(self: Path, target: Path) -> Path:
            if target == tmp_path / "pack" and text(self) == "new":
                raise OSError(errno.EBUSY, "Device or resource busy")
            return rename(self, target)

        monkeypatch.setattr(Path, "rename", failing)
        with pytest.raises(WriteError, match="resource busy"):
            put(tmp_path / "pack", "new", same=True)
        assert text(tmp_path / "pack") == "old"
        assert names(tmp_path) == ["pack"]


class TestRefusals:
    def test_another_package_is_not_overwritten(self, tmp_path: Path) -> None:
        put(tmp_path / "pack", "old")
        with pytest.raises(
            WriteError, match=r"pack: holds something else .* allowed: .*; do: .* --replace, .*previous"
        ):
            put(tmp_path / "pack", "new")
        assert text(tmp_path / "pack") == "old"
        assert names(tmp_path) == ["pack"]

    @pytest.mark.parametrize("replace", [False, True])
    def test_a_file_is_refused(self, tmp_path: Path, *, replace: bool) -> None:
        (tmp_path / "pack").write_text("mine", encoding="utf-8")
        with pytest.raises(WriteError, match=r"pack: is a file or a link; allowed: .*; do: name a folder of its own"):
            put(tmp_path / "pack", "new", replace=replace)
        assert (tmp_path / "pack").read_text(encoding="utf-8") == "mine"

    @pytest.mark.parametrize("target", ["real", "gone"])
    def test_a_link_is_refused(self, tmp_path: Path, target: str) -> None:
        (tmp_path / "real").mkdir()
        (tmp_path / "pack").symlink_to(tmp_path / target)
        with pytest.raises(WriteError, match="pack: is a file or a link"):
            put(tmp_path / "pack", "new", replace=True)
        assert names(tmp_path) == ["pack", "real"]

    def test_a_parent_that_is_a_file_is_refused(self, tmp_path: Path) -> None:
        (tmp_path / "file").write_text("mine", encoding="utf-8")
        with pytest.raises(WriteError, match=r"pack: cannot be written \(.*\); allowed: .*; do: name such a place"):
            put(tmp_path / "file" / "sub" / "pack", "new")
        assert names(tmp_path) == ["file"]

    def test_a_name_that_is_too_long_is_refused(self, tmp_path: Path) -> None:
        with pytest.raises(WriteError, match=r"cannot be written \(.*too long"):
            put(tmp_path / ("x" * 300), "new")
        assert names(tmp_path) == []

    @pytest.mark.skipif(os.name == "nt" or os.geteuid() == 0, reason="for the superuser every folder is open")
    def test_a_closed_parent_is_refused(self, tmp_path: Path) -> None:
        (tmp_path / "closed").mkdir()
        (tmp_path / "closed").chmod(stat.S_IRUSR | stat.S_IXUSR)
        with pytest.raises(WriteError, match=r"cannot be written \(Permission denied\)"):
            put(tmp_path / "closed" / "pack", "new")

    def test_a_permission_error_is_refused(self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
        def denied(self: Path, **options: object) -> None:
            raise PermissionError(errno.EACCES, "Permission denied", str(self))

        monkeypatch.setattr(Path, "mkdir", denied)
        with pytest.raises(WriteError, match=r"pack: cannot be written \(Permission denied\)"):
            put(tmp_path / "pack", "new")

    @pytest.mark.parametrize("above", [".", ".."])
    def test_the_folder_one_works_in_is_not_exchanged(
        self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, above: str
    ) -> None:
        put(tmp_path / "pack", "old")
        (tmp_path / "pack" / "sub").mkdir()
        monkeypatch.chdir(tmp_path / "pack" / ("" if above == "." else "sub"))
        with pytest.raises(WriteError, match="is the folder you are working in, or one around it"):
            put(Path(above), "new", replace=True, same=True)
        assert (tmp_path / "pack" / "job.toml").read_text(encoding="utf-8") == "old"


class TestFailures:
    @pytest.mark.parametrize("error", [ValueError("broken"), KeyboardInterrupt(), FormatError("bad file")])
    def test_whatever_is_raised_leaves_no_trace(self, tmp_path: Path, error: BaseException) -> None:
        def fail(stage: Path) -> None:
            write_file(stage / "job.toml", "new")
            (stage / "sub").mkdir()
            raise error

        with (
            pytest.raises(type(error)) as caught,
            staged(tmp_path / "a" / "b" / "pack", replace=False, same_package=nothing) as stage,
        ):
            fail(stage)
        assert caught.value is error
        assert names(tmp_path) == []

    def test_parents_that_others_use_stay(self, tmp_path: Path) -> None:
        def fail() -> None:
            (tmp_path / "a" / "mine").write_text("", encoding="utf-8")
            raise ValueError("broken")

        with (
            pytest.raises(ValueError, match="broken"),
            staged(tmp_path / "a" / "b" / "pack", replace=False, same_package=nothing),
        ):
            fail()
        assert names(tmp_path / "a") == ["mine"]

    def test_a_full_disk_is_a_refusal(self, tmp_path: Path) -> None:
        with (
            pytest.raises(
                WriteError, match=r"pack: cannot be written \(No space left on device\); .*make room"
            ) as caught,
            staged(tmp_path / "pack", replace=False, same_package=nothing),
        ):
            raise OSError(errno.ENOSPC, "No space left on device")
        assert isinstance(caught.value.__cause__, OSError)
        assert names(tmp_path) == []

    def test_a_refusal_in_the_body_keeps_its_words(self, tmp_path: Path) -> None:
        with (
            pytest.raises(WriteError, match=r"^my words$"),
            staged(tmp_path / "pack", replace=False, same_package=nothing),
        ):
            raise WriteError("my words")

    def test_a_failure_leaves_the_old_package(self, tmp_path: Path) -> None:
        put(tmp_path / "pack", "old")
        with (
            pytest.raises(ValueError, match="broken"),
            staged(tmp_path / "pack", replace=True, same_package=anything),
        ):
            raise ValueError("broken")
        assert text(tmp_path / "pack") == "old"
        assert names(tmp_path) == ["pack"]

    def test_a_place_taken_meanwhile_is_not_overwritten(self, tmp_path: Path) -> None:
        with (
            pytest.raises(WriteError, match=r"pack: cannot be written \("),
            staged(tmp_path / "pack", replace=False, same_package=nothing),
        ):
            (tmp_path / "pack").write_text("mine", encoding="utf-8")
        assert (tmp_path / "pack").read_text(encoding="utf-8") == "mine"
        assert names(tmp_path) == ["pack"]

    @pytest.mark.parametrize("replace", [False, True])
    def test_a_folder_filled_meanwhile_is_not_removed(self, tmp_path: Path, *, replace: bool) -> None:
        with (
            pytest.raises(WriteError, match=r"pack: cannot be written \("),
            staged(tmp_path / "pack", replace=replace, same_package=anything),
        ):
            put(tmp_path / "pack", "theirs")
        assert text(tmp_path / "pack") == "theirs"
        assert names(tmp_path) == ["pack"]

    def test_the_folder_one_works_in_filled_meanwhile_stays_as_it_is(
        self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
    ) -> None:
        (tmp_path / "pack").mkdir()
        monkeypatch.chdir(tmp_path / "pack")

        def write_both(stage: Path) -> None:
            for folder in (stage, tmp_path / "pack"):
                write_file(folder / "job.toml", folder.name)
            write_file(stage / "file", "")

        with (
            pytest.raises(WriteError, match="pack: was filled meanwhile; allowed: an empty folder; do: "),
            staged(Path(), replace=False, same_package=nothing) as stage,
        ):
            write_both(stage)
        assert names(tmp_path / "pack") == ["job.toml"]
        assert names(tmp_path) == ["pack"]


class TestFiles:
    def test_text_keeps_its_line_ends(self, tmp_path: Path) -> None:
        write_file(tmp_path / "file", "a\nb\r\nµ")
        assert (tmp_path / "file").read_bytes() == b"a\nb\r\n\xc2\xb5"
        assert names(tmp_path) == ["file"]

    def test_bytes_are_written_as_they_are(self, tmp_path: Path) -> None:
        write_file(tmp_path / "file", b"\x00\xff")
        assert (tmp_path / "file").read_bytes() == b"\x00\xff"

    def test_a_file_is_overwritten_only_when_asked_for(self, tmp_path: Path) -> None:
        write_file(tmp_path / "file", "old")
        with pytest.raises(WriteError, match="file: exists already; allowed: a new name; do: "):
            write_file(tmp_path / "file", "new")
        assert (tmp_path / "file").read_text(encoding="utf-8") == "old"
        write_file(tmp_path / "file", "new", overwrite=True)
        assert (tmp_path / "file").read_text(encoding="utf-8") == "new"

    def test_a_link_is_followed(self, tmp_path: Path) -> None:
        write_file(tmp_path / "real", "old")
        (tmp_path / "link").symlink_to(tmp_path / "real")
        write_file(tmp_path / "link", "new", overwrite=True)
        assert (tmp_path / "link").is_symlink()
        assert (tmp_path / "real").read_text(encoding="utf-8") == "new"

    @pytest.mark.skipif(os.name == "nt", reason="a device file")
    def test_a_device_stays_one(self) -> None:
        write_file(Path(os.devnull), "gone", overwrite=True)
        assert Path(os.devnull).is_char_device()

    @pytest.mark.parametrize("place", ["absent/file", "folder"])
    def test_what_cannot_be_written_is_refused(self, tmp_path: Path, place: str) -> None:
        (tmp_path / "folder").mkdir()
        with pytest.raises(WriteError, match=rf"{place}: cannot be written \(.*\); allowed: .*; do: "):
            write_file(tmp_path / place, "new", overwrite=True)
        assert names(tmp_path) == ["folder"]

    def test_a_full_disk_leaves_the_old_file(self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
        write_file(tmp_path / "file", "old")

        def full(self: Path, target: Path) -> Path:
            raise OSError(errno.ENOSPC, "No space left on device")

        monkeypatch.setattr(Path, "replace", full)
        with pytest.raises(WriteError, match="No space left on device"):
            write_file(tmp_path / "file", "new", overwrite=True)
        assert (tmp_path / "file").read_text(encoding="utf-8") == "old"
        assert names(tmp_path) == ["file"]


def test_everything_public_is_listed() -> None:
    assert package.__all__ == ["staged", "write_file"]
