"""A bundle onto disk in one atomic step."""

from __future__ import annotations

import json
import os
import shutil
import tempfile
from pathlib import Path, PurePosixPath

from encoder_forge.bundle.records import DECODER, ENCODER, MANIFEST, Bundle
from encoder_forge.errors import InputError, MachineError


def check_destination(folder: Path, overwrite: bool) -> None:
    """Refuse an output that exists, before any work is done.

    Parameters
    ----------
    folder : Path
    overwrite : bool

    Raises
    ------
    InputError
        If the folder exists and `overwrite` is not set, or what exists is not a bundle.
    """
    if not (folder.exists() or folder.is_symlink()):
        return
    if not overwrite:
        raise InputError(f"{folder}: exists already; accepted: a new folder, or --overwrite to replace it")
    if not folder.is_dir() or folder.is_symlink() or (
        any(folder.iterdir()) and not (folder / MANIFEST).is_file()
    ):
        # --overwrite removes a whole folder; it must never take one that holds something else.
        raise InputError(f"{folder}: --overwrite replaces bundles only, and this holds no {MANIFEST}")


def write_bundle(bundle: Bundle, folder: Path, overwrite: bool = False) -> None:
    """Write a bundle to a temporary sibling and rename it, so that nothing half-written looks finished.

    Parameters
    ----------
    bundle : Bundle
    folder : Path
        Missing parents are created.
    overwrite : bool

    Raises
    ------
    InputError
        See `check_destination`.
    MachineError
        If the folder cannot be written.
    """
    check_destination(folder, overwrite)
    try:
        folder.parent.mkdir(parents=True, exist_ok=True)
        temporary = Path(tempfile.mkdtemp(prefix=f".{folder.name}.", dir=folder.parent))
    except OSError as error:
        raise MachineError(f"{folder}: cannot be written ({error.strerror or error})") from error
    try:
        _fill(bundle, temporary)
        _swap_in(temporary, folder)
    except OSError as error:
        raise MachineError(f"{folder}: cannot be written ({error.strerror or error})") from error
    finally:
        shutil.rmtree(temporary, ignore_errors=True)


def _fill(bundle: Bundle, folder: Path) -> None:
    for file in bundle.source_files:
        target = folder / PurePosixPath(file.name)
        target.parent.mkdir(parents=True, exist_ok=True)
        target.write_bytes(file.content)
    (folder / ENCODER).write_text(bundle.encoder, encoding="utf-8", newline="\n")
    (folder / DECODER).write_text(bundle.decoder, encoding="utf-8", newline="\n")
    # Last, so that a folder without a manifest is recognisably unfinished.
    text = json.dumps(bundle.manifest, indent=2, allow_nan=False, ensure_ascii=False) + "\n"
    (folder / MANIFEST).write_text(text, encoding="utf-8", newline="\n")
    umask = os.umask(0)
    os.umask(umask)
    folder.chmod(0o777 & ~umask)


def _swap_in(temporary: Path, folder: Path) -> None:
    if not folder.exists():
        temporary.rename(folder)
        return
    # A folder cannot be replaced in one step everywhere: the old one steps aside and is removed at the end.
    aside = Path(tempfile.mkdtemp(prefix=f".{folder.name}.old.", dir=folder.parent))
    try:
        folder.rename(aside / "old")
        try:
            temporary.rename(folder)
        except OSError:
            (aside / "old").rename(folder)
            raise
    finally:
        shutil.rmtree(aside, ignore_errors=True)
