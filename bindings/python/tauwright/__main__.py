"""python -m tauwright record.csv [request.json] [--out FOLDER]"""

from __future__ import annotations

import argparse
import sys
from pathlib import Path

import tauwright as tw
from tauwright.request import RequestError, read_request


def _arguments(argv: list[str] | None) -> argparse.Namespace:
    parser = argparse.ArgumentParser(
        prog="python -m tauwright",
        description="Tune a loop from a bump-test record: print the tuning sheet, write it as JSON, draw it as PNG.",
        epilog="Record columns: time_s or time (RFC 3339), output, process_value; optionally quality, setpoint, mode. "
        "The request's keys are the keyword arguments of tauwright.TuningRequest.")
    parser.add_argument("record", help="CSV file of the bump test")
    parser.add_argument("request", nargs="?", help="JSON file of what to tune for")
    parser.add_argument("--out", metavar="FOLDER", default=".", help="where to write (default: here)")
    return parser.parse_args(argv)


def _run(record_path: str, request_path: str | None, folder: Path) -> tuple[Path, Path]:
    record = tw.read_record(record_path)
    request = read_request(request_path) if request_path is not None else None
    sheet = tw.tune(record, request)
    # Only now: importing the drawing library takes longer than all the rest.
    from tauwright.plot import save_figure

    folder.mkdir(parents=True, exist_ok=True)
    stem = Path(record_path).stem
    json_path, picture_path = folder / f"{stem}_sheet.json", folder / f"{stem}_sheet.png"
    json_path.write_text(sheet.json(), encoding="utf-8")
    save_figure(record, sheet, picture_path)
    print(sheet.text())
    return json_path, picture_path


def main(argv: list[str] | None = None) -> int:
    arguments = _arguments(argv)
    # Names and units may hold any character; a terminal that lacks one shows a substitute.
    if hasattr(sys.stdout, "reconfigure"):
        sys.stdout.reconfigure(errors="replace")
    try:
        paths = _run(arguments.record, arguments.request, Path(arguments.out))
    except tw.Error as problem:
        print(f"tauwright: {problem}", file=sys.stderr)
        return 2
    except OSError as problem:
        print(f"tauwright: cannot write to {arguments.out} ({problem}); give another folder with --out", file=sys.stderr)
        return 2
    except ImportError as problem:
        print(f"tauwright: {problem}; the picture needs NumPy and Matplotlib: install python3-matplotlib", file=sys.stderr)
        return 2
    for path in paths:
        print(path)
    return 0


if __name__ == "__main__":
    sys.exit(main())
