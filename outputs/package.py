"""Folders and files that appear whole or not at all.

A package is written into a *staging* folder beside its place, on the same file system, and moved there when it is
finished. What may be in its place already:

========================================  ==================================================================
nothing, or an empty folder               the new package takes its place
a package of the same job                 it makes way for the new one, and is removed after that
anything else, and any with ``replace``   with ``replace`` alone, it becomes FOLDER.previous and stays
========================================  ==================================================================

A FOLDER.previous from an earlier time is kept under a hidden name until the new package stands, and only then removed;
if it holds anything but files of the names a package has, nothing is done at all: it may be somebody's own. A run that
is killed can leave hidden folders ``.dishwright-….partial`` behind, which nothing reads or waits for.
"""

from __future__ import annotations

import os
import secrets
import shutil
from collections.abc import Callable, Collection, Iterator
from contextlib import ExitStack, contextmanager, suppress
from pathlib import Path

from profiles.errors import DishwrightError, WriteError

__all__ = ["staged", "write_file"]


@contextmanager
def staged(
    folder: Path,
    *,
    replace: bool,
    same_package: Callable[[Path], bool],
    expendable: Callable[[Path], bool] = lambda _: True,
    names: Collection[str] = (),
) -> Iterator[Path]:
    """Lend a fresh folder to write into, and move it to its place when all went well.

    Parameters
    ----------
    folder : Path
        Where the package is to stand; missing parents are made.
    replace : bool
        Whether whatever stands there may become FOLDER.previous.
    same_package : callable
        Tells of a folder that is not empty whether it may be rewritten without ``replace``.
    expendable : callable
        Tells of an older FOLDER.previous that holds a package whether it may be removed.
    names : collection of str
        Names that a package's files may have besides those of this one.

    Yields
    ------
    Path
        An empty folder beside ``folder``.

    Raises
    ------
    WriteError
        If the place is taken or cannot be written, or the disk is full. Whatever is raised, what stood there stands
        there still, and nothing else is left.
    """
    with ExitStack() as undo:
        try:
            place = Path(os.path.abspath(folder))  # noqa: PTH100 - resolve() would follow the links refused here
            taken = _is_taken(place)
            if taken:
                _check_exchange(place, replace=replace, same_package=same_package)
            _make_parents(place.parent, undo)
            stage = _sibling(place)
            stage.mkdir()
            undo.callback(shutil.rmtree, stage, ignore_errors=True)
            yield stage
            if taken:
                _exchange(stage, place, replace=replace, expendable=expendable, names=names)
            else:
                _move_in(stage, place)
        except OSError as error:
            if isinstance(error, DishwrightError):
                raise
            raise _unwritten(folder, error) from error
        undo.pop_all()


def write_file(path: Path, content: str | bytes, *, overwrite: bool = False) -> None:
    """Write one file, whole or not at all.

    Parameters
    ----------
    path : Path
        The file; its folder must exist. A link is followed, and what is no plain file (a pipe, a terminal) is written
        to as it is.
    content : str or bytes
        What to write; text in UTF-8, its line ends as they are.
    overwrite : bool
        Whether a file that exists may be replaced.

    Raises
    ------
    WriteError
        If the file exists and must not be replaced, or cannot be written.
    """
    data = content.encode("utf-8") if isinstance(content, str) else content
    target = Path(os.path.realpath(path))
    if os.path.lexists(path) and not overwrite:
        raise WriteError(f"{path}: exists already; allowed: a new name; do: choose another, or move the old file away")
    with ExitStack() as undo:
        try:
            if target.exists() and not target.is_file():
                target.write_bytes(data)
                return
            partial = _sibling(target)
            undo.callback(_unlink_quietly, partial)
            with partial.open("xb") as stream:
                stream.write(data)
            partial.replace(target)
        except OSError as error:
            raise _unwritten(path, error) from error


def _is_taken(place: Path) -> bool:
    """Return whether a place is a folder that holds anything; refuse what is no folder."""
    if _is_other_than_folder(place):
        raise WriteError(
            f"{place}: is a file or a link; allowed: an absent or empty folder; do: name a folder of its own"
        )
    return place.is_dir() and any(place.iterdir())


def _check_exchange(place: Path, *, replace: bool, same_package: Callable[[Path], bool]) -> None:
    """Refuse to exchange what stands in a place where that cannot or must not be."""
    here = Path.cwd().resolve()
    if place.resolve() in (here, *here.parents):
        raise WriteError(
            f"{place}: is the folder you are working in, or one around it, and not empty; allowed: a folder that can "
            f"be exchanged as a whole; do: name another, or leave it first and name it from outside"
        )
    if replace:
        _check_previous(_previous(place))
    elif not same_package(place):
        raise WriteError(
            f"{place}: holds something else than an untouched package of this job; allowed: an absent or empty folder; "
            f"do: name another, or say --replace, which keeps what is there as {_previous(place).name}"
        )


def _is_other_than_folder(place: Path) -> bool:
    """Return whether a name is taken by anything but a folder."""
    return place.is_symlink() or (os.path.lexists(place) and not place.is_dir())


def _check_previous(previous: Path) -> None:
    """Refuse an older FOLDER.previous that is no folder."""
    if _is_other_than_folder(previous):
        raise WriteError(
            f"{previous}: is a file or a link; allowed: no such name, or an older package, as what is replaced is kept "
            f"there; do: move it away"
        )


def _check_previous_is_package(previous: Path, stage: Path, names: Collection[str]) -> None:
    """Refuse to remove an older FOLDER.previous that holds more than files of a package's names."""
    known = {*names, *(entry.name for entry in stage.iterdir())}
    for entry in sorted(previous.iterdir()):
        if entry.name not in known or entry.is_symlink() or not entry.is_file():
            raise WriteError(
                f"{previous}: holds {entry.name}, which is no part of a package and would be lost; allowed: no such "
                f"folder, or an older package; do: move it away"
            )


def _check_expendable(previous: Path, expendable: Callable[[Path], bool]) -> None:
    """Refuse to remove an older FOLDER.previous that somebody has written in."""
    if not expendable(previous):
        raise WriteError(
            f"{previous}: holds a package that was written in, such as readings, and would be lost; allowed: no such "
            f"folder, or an untouched package; do: move it away"
        )


def _exchange(
    stage: Path, place: Path, *, replace: bool, expendable: Callable[[Path], bool], names: Collection[str]
) -> None:
    """Put the finished package in the place of what stands there, or undo all of it."""
    outdated = _sibling(place)
    with ExitStack() as undo:
        if replace:
            previous = _previous(place)
            if previous.is_dir():
                _check_previous_is_package(previous, stage, names)
                _check_expendable(previous, expendable)
                _rename(previous, outdated, undo)
            _rename(place, previous, undo)
        else:
            _rename(place, outdated, undo)
        stage.rename(place)
        undo.pop_all()
    shutil.rmtree(outdated, ignore_errors=True)


def _move_in(stage: Path, place: Path) -> None:
    """Move the finished package to a place that is absent or an empty folder; one filled meanwhile stays as it is."""
    if place.is_dir() and place.samefile(Path.cwd()):
        _fill(place, stage)
        return
    if os.name == "nt" and place.is_dir():
        place.rmdir()
    stage.rename(place)


def _fill(place: Path, stage: Path) -> None:
    """Move the files one by one into the folder somebody works in, who would be left in one that is gone."""
    with ExitStack() as undo:
        for entry in sorted(stage.iterdir()):
            if os.path.lexists(place / entry.name):
                raise WriteError(f"{place}: was filled meanwhile; allowed: an empty folder; do: name another")
            _rename(entry, place / entry.name, undo)
        stage.rmdir()
        undo.pop_all()


def _rename(source: Path, target: Path, undo: ExitStack) -> None:
    """Rename a folder or file, and back again if what follows fails."""
    source.rename(target)
    undo.callback(target.rename, source)


def _previous(place: Path) -> Path:
    """Return the name under which a replaced package stays."""
    return place.with_name(f"{place.name}.previous")


def _make_parents(parent: Path, undo: ExitStack) -> None:
    """Make the missing parents, and remove them again if what follows fails."""
    missing = [folder for folder in (parent, *parent.parents) if not folder.exists()]
    for folder in reversed(missing):
        folder.mkdir(exist_ok=True)
        undo.callback(_rmdir_quietly, folder)


def _sibling(place: Path) -> Path:
    """Return a name beside a place that nothing has yet."""
    return place.with_name(f".dishwright-{secrets.token_hex(6)}.partial")


def _rmdir_quietly(folder: Path) -> None:
    """Remove a folder if it is empty."""
    with suppress(OSError):
        folder.rmdir()


def _unlink_quietly(path: Path) -> None:
    """Remove a file if it is there."""
    with suppress(OSError):
        path.unlink()


def _unwritten(place: Path, error: OSError) -> WriteError:
    """Return the refusal of a place that the system does not let us write."""
    reason = error.strerror or str(error)
    return WriteError(
        f"{place}: cannot be written ({reason}); allowed: a place on a disk with room, in a folder you may write to; "
        f"do: name such a place, or make room"
    )
