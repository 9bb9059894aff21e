"""The options that commands which compute from files have in common, and what they name, read and checked."""

import hashlib
import math
import shlex
from argparse import ArgumentParser, ArgumentTypeError
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from core.measurements.reading.covariance import check_positive_definite, read_covariance
from core.measurements.reading.curve import read_curve
from core.measurements.reading.limits import MAXIMUM_BYTES
from core.measurements.reading.names import safe_name
from core.measurements.reading.release import release_data
from core.measurements.reading.roles import guess_roles
from core.measurements.reading.table import Table, read_table
from core.measurements.reading.windows import read_windows
from core.user_error import UserError
from fits.engine import VERSION
from fits.engine.data import Axis, CurveTable, Data, ErrorSource
from fits.engine.settings import DEFAULT_DRAWS, DEFAULT_LEVELS, Settings, Shrinkage


@dataclass(frozen=True, eq=False)
class Inputs:
    """Data, curves and settings as the engine takes them, and where each came from."""

    data: Data
    curves: tuple[CurveTable, ...]
    settings: Settings
    seed: int
    context: dict[str, Any]


@dataclass(frozen=True)
class _File:
    name: str
    content: bytes

    @property
    def sha256(self) -> str:
        return hashlib.sha256(self.content).hexdigest()


def add_options(parser: ArgumentParser, *, matrix_option: str = "--windows") -> None:
    """DATA and the options of a computation."""
    parser.add_argument("data", metavar="DATA", help="table with x, y and error (or lo, hi bins)")
    parser.add_argument("--covariance", metavar="FILE", help="n × n covariance, .npy or text")
    parser.add_argument(
        "--levels",
        type=_levels,
        default=DEFAULT_LEVELS,
        metavar="L,L,…",
        help="confidence levels, default 0.67,0.9,0.95,0.99",
    )
    resolution = parser.add_mutually_exclusive_group()
    resolution.add_argument("--resolution", type=int, metavar="N", help="number of basis functions")
    resolution.add_argument(
        "--feature-width",
        type=float,
        metavar="W",
        help="narrowest feature to judge, in x (log axis: in ln x)",
    )
    resolution.add_argument("--full", action="store_true", help="as many functions as points")
    parser.add_argument(
        "--shrinkage", choices=[kind.value for kind in Shrinkage], default=Shrinkage.MONOTONE.value
    )
    parser.add_argument("--axis", choices=[axis.value for axis in Axis], default=Axis.LINEAR.value)
    parser.add_argument(
        "--errors",
        choices=[source.value for source in ErrorSource],
        default=ErrorSource.GIVEN.value,
        help="given: by an error column or a covariance; estimate: one unknown size, to which an error column is "
        "relative; counts: y are Poisson counts; profile: changing along x, estimated",
    )
    parser.add_argument(
        "--calibration",
        type=_calibration,
        default=0.0,
        metavar="FRACTION",
        help="fraction to which the scale of y is known, as 0.05; default 0, exact",
    )
    parser.add_argument(
        matrix_option,
        dest="matrix",
        metavar="FILE",
        help="matrix through which the points see a curve, .npy or text: a row with the x of its grid, then a row of "
        "weights for each point",
    )
    parser.add_argument("--draws", type=int, default=DEFAULT_DRAWS, help=f"default {DEFAULT_DRAWS}")
    parser.add_argument("--seed", type=_seed, default=1, help="default 1")
    parser.add_argument("--json", metavar="FILE", help="write the result as JSON; - for standard output")


def read_inputs(options: Mapping[str, Any], curve_paths: Sequence[str], *, command: str) -> Inputs:
    """Read every file that the options name. Raises UserError, or InputRefused for the settings."""
    settings = Settings(
        levels=options["levels"],
        resolution=options["resolution"],
        feature_width=options["feature_width"],
        full=options["full"],
        shrinkage=Shrinkage(options["shrinkage"]),
        draws=options["draws"],
    )
    table_file = _read(options["data"])
    table = read_table(table_file.content, table_file.name)
    covariance_file = _read(options["covariance"]) if options["covariance"] else None
    windows_file = _read(options["matrix"]) if options["matrix"] else None
    data = _data(table, covariance_file, windows_file, options)
    files = [_read(path) for path in curve_paths]
    curves = tuple(
        read_curve(file.content, file.name, name)
        for file, name in zip(files, _curve_names(curve_paths), strict=True)
    )
    context = {
        "collaboration": None,
        "measurement": _measurement(table, options["axis"]),
        "release": {
            "number": None,
            "note": "",
            "file_name": table_file.name,
            "file_sha256": table_file.sha256,
            "covariance_name": covariance_file.name if covariance_file else "",
            "covariance_sha256": covariance_file.sha256 if covariance_file else "",
            "windows_name": windows_file.name if windows_file else "",
            "windows_sha256": windows_file.sha256 if windows_file else "",
            "calibration": data.calibration,
            "points": data.points,
            "published_at": None,
        },
        "curves": [_curve_context(curve, file) for curve, file in zip(curves, files, strict=True)],
        "settings": _settings_context(settings),
        "seed": options["seed"],
        "engine": VERSION,
        "fingerprint": None,
        "requested_by": None,
        "created_at": None,
        "ended_at": None,
        "recompute": _command_line(command, options, curve_paths),
        "source": f"manage.py {command}",
    }
    return Inputs(data, curves, settings, options["seed"], context)


def _data(table: Table, covariance: _File | None, windows: _File | None, options: Mapping[str, Any]) -> Data:
    matrix = weights = None
    if covariance is not None:
        matrix = read_covariance(covariance.content, covariance.name, len(table.values))
        check_positive_definite(matrix, covariance.name)
    if windows is not None:
        weights = read_windows(windows.content, windows.name, len(table.values))
    return release_data(
        table,
        guess_roles(table),
        axis=Axis(options["axis"]),
        source=ErrorSource(options["errors"]),
        covariance=matrix,
        covariance_name=covariance.name if covariance else "",
        calibration=options["calibration"],
        windows=weights,
        windows_name=windows.name if windows else "",
    )


def _read(path: str) -> _File:
    """A file's bytes; what is too large is refused by its size, unread."""
    name = safe_name(path)
    try:
        if not Path(path).is_file():
            raise UserError("no-file", "there is no such file", "Check the path", name)
        if Path(path).stat().st_size > MAXIMUM_BYTES:
            reason = f"is larger than {MAXIMUM_BYTES // 2**20} MB"
            raise UserError("file-too-large", reason, "Thin or split it", name)
        return _File(name, Path(path).read_bytes())
    except (OSError, ValueError) as error:
        raise UserError("no-file", f"cannot be read: {error}", "Check the path", name) from error


def _curve_names(paths: Sequence[str]) -> list[str]:
    """File names without their endings; where two are alike, the paths."""
    stems = [safe_name(Path(path).stem) for path in paths]
    names = [path if stems.count(stem) > 1 else stem for path, stem in zip(paths, stems, strict=True)]
    for position, name in enumerate(names):
        if name in names[:position]:
            raise UserError("curve-twice", "this curve is given twice", "Name each curve once", name)
    return names


def _measurement(table: Table, axis: str) -> dict[str, Any]:
    labels = dict(zip(guess_roles(table), table.headers, strict=True))
    return {
        "name": Path(table.file_name).stem,
        "about": "",
        "x_label": labels.get("x") or "x",
        "y_label": labels.get("y") or "y",
        "x_unit": "",
        "y_unit": "",
        "axis": axis,
    }


def _curve_context(curve: CurveTable, file: _File) -> dict[str, Any]:
    return {
        "name": curve.name,
        "theory": curve.name,
        "version": None,
        "proposed_by": "",
        "reference": "",
        "file_name": file.name,
        "file_sha256": file.sha256,
        "submitted_by": None,
        "submitted_at": None,
    }


def _settings_context(settings: Settings) -> dict[str, Any]:
    return {
        "levels": list(settings.levels),
        "resolution": settings.resolution,
        "feature_width": settings.feature_width,
        "full": settings.full,
        "shrinkage": settings.shrinkage.value,
        "draws": settings.draws,
    }


def _command_line(command: str, options: Mapping[str, Any], curve_paths: Sequence[str]) -> str:
    """A command that computes the same again; files by name, since paths are this machine's."""
    words = ["python", "manage.py", command, safe_name(options["data"]), *map(safe_name, curve_paths)]
    # Windows of the command of features are stretches of x, so that it calls the matrix otherwise.
    matrix = "window-matrix" if command == "features" else "windows"
    for option, name in (("covariance", "covariance"), (matrix, "matrix")):
        if options[name]:
            words += [f"--{option}", safe_name(options[name])]
    words += ["--levels", ",".join(f"{level:g}" for level in options["levels"])]
    for name in ("resolution", "feature_width"):
        if options[name] is not None:
            words += [f"--{name.replace('_', '-')}", repr(options[name])]
    if options["calibration"]:
        words += ["--calibration", repr(options["calibration"])]
    if options["full"]:
        words.append("--full")
    for name in ("shrinkage", "axis", "errors", "draws", "seed"):
        words += [f"--{name}", str(options[name])]
    return shlex.join(words)


def _levels(text: str) -> tuple[float, ...]:
    return tuple(float(part) for part in text.split(","))


def _calibration(text: str) -> float:
    try:
        calibration = float(text)
    except ValueError:
        calibration = math.nan
    if not 0.0 <= calibration < 1.0:
        raise ArgumentTypeError(f"{text!r} is no fraction from 0 to below 1; give 0.05 for 5 %")
    return calibration


def _seed(text: str) -> int:
    seed = int(text)
    if not 0 <= seed < 2**63:
        raise ValueError
    return seed
