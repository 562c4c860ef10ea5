"""Measured transfers that board.toml names: their tables, and what contradicts them."""

from collections.abc import Iterator, Mapping
from typing import NamedTuple

from edgeplan.board import BoardFile, MeasuredTransfer
from edgeplan.errors import Problem
from edgeplan.limits import LimitLine, ids, judged_range, line
from edgeplan.readers import transfer
from edgeplan.readers.files import Folder
from edgeplan.readers.references import EACH, found
from edgeplan.readers.toml import Document

KEYS: tuple[tuple[str, transfer.Quantity], ...] = (
    ("file", "transfer"),
    ("antenna_factor", "antenna factor"),
)
USUAL_HZ = (30e6, 1e9)  # judged range where the limits of the board cannot be read


class _Tables(NamedTuple):
    """What the files of one transfer hold; None where one cannot be read."""

    level: transfer.Transfer | None
    antenna_factor: transfer.Transfer | None


def read(
    folder: Folder, document: Document, file: BoardFile | None, own: Mapping[str, LimitLine]
) -> list[MeasuredTransfer]:
    """Read the tables of all transfers.

    Parameters
    ----------
    folder : Folder
        Grows by the hash of each file, and by everything that is wrong.
    document : Document
        board.toml.
    file : BoardFile or None
        The same, validated; None where it is not in order.
    own : mapping
        The user's own limit lines by id.

    Returns
    -------
    list of MeasuredTransfer
        In the order of board.toml; empty where board.toml is not in order.
    """
    judged_hz = _judged_hz(file, own)
    kept: dict[tuple[str, str], transfer.Transfer | None] = {}
    tables = []
    for (_, index), _entry in found(document.data, ("transfer", EACH)):
        read_one = [
            _table(folder, document, ("transfer", index, key), quantity, judged_hz, kept)
            for key, quantity in KEYS
        ]
        tables.append(_Tables(*read_one))
    if file is None:
        return []
    folder.problems += _contradictions(document, file, tables)
    return [
        MeasuredTransfer(
            stated=stated,
            rows=pair.level.rows,
            antenna_factor=pair.antenna_factor.rows if pair.antenna_factor else (),
        )
        for stated, pair in zip(file.transfer, tables, strict=True)
        if pair.level is not None
    ]


def _judged_hz(file: BoardFile | None, own: Mapping[str, LimitLine]) -> tuple[float, float]:
    """Return the range in which a table must have no gap. [Hz]"""
    names = file.emission.limits if file else []
    lines = [own[name] if name in own else line(name) for name in names if name in {*own, *ids()}]
    if file is None or not lines:
        return USUAL_HZ
    judged = judged_range(lines, own, file.board.highest_internal_frequency_hz)
    return judged.lowest_hz, judged.covered_to_hz


def _table(
    folder: Folder,
    document: Document,
    path: tuple[str, int | str, str],
    quantity: transfer.Quantity,
    judged_hz: tuple[float, float],
    kept: dict[tuple[str, str], transfer.Transfer | None],
) -> transfer.Transfer | None:
    """Read the file named at a key; one that is named twice is read once."""
    name = next((value for _, value in found(document.data, path)), None)
    if not isinstance(name, str):
        return None
    if (name, quantity) not in kept:
        text = folder.text(name, document.where(path))
        kept[name, quantity] = (
            None
            if text is None
            else transfer.read(text, name, folder.problems, quantity=quantity, judged_hz=judged_hz)
        )
    return kept[name, quantity]


def _contradictions(
    document: Document, file: BoardFile, tables: list[_Tables]
) -> Iterator[Problem]:
    """Yield receiver levels without an antenna factor, one too many, and cables there are none."""
    for index, (stated, pair) in enumerate(zip(file.transfer, tables, strict=True)):
        at = ("transfer", index)
        needs = pair.level is not None and pair.level.needs_antenna_factor
        if needs and stated.antenna_factor is None:
            message = f"{stated.file!r} holds receiver over port voltage, no field"
            hint = 'add antenna_factor = "antenna.csv", a table of frequency and dB(1/m)'
            yield document.where((*at, "file")).problem(message, hint)
        if pair.level is not None and not needs and stated.antenna_factor is not None:
            message = f"{stated.file!r} holds field over port voltage already"
            hint = "leave the antenna factor out"
            yield document.where((*at, "antenna_factor")).problem(message, hint)
        if stated.replaces == "cable" and file.board.no_cables and not file.cable:
            hint = "declare the cables, or leave this transfer out"
            yield document.where((*at, "replaces")).problem("the board declares no cables", hint)
