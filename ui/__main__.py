"""python -m ui [CASE.json]: opens the app. Exit status: 0 done, 2 bad input, 3 no display."""

from __future__ import annotations

import argparse
import logging
import os
import sys
from collections.abc import Sequence
from pathlib import Path

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")  # small arrays: more threads only cost; set before numpy loads
NO_DISPLAY = 3
SIZE = (390, 844)


def main(arguments: Sequence[str] | None = None) -> int:
    """Check what the window needs before Kivy is imported, then run the app."""
    chosen = _parser().parse_args(arguments)
    if chosen.case is not None and not chosen.case.is_file():
        print(f"ui: {chosen.case} is not a file.", file=sys.stderr)
        return 2
    if chosen.pictures is None and _display_is_missing():
        print(
            "ui: there is no display: DISPLAY and WAYLAND_DISPLAY are both empty. Run this on a desktop, or write the "
            "demo's papers without a window by: python -m planner demo --out FOLDER",
            file=sys.stderr,
        )
        return NO_DISPLAY
    data_folder = chosen.data or _data_folder()
    try:
        (data_folder / "kivy").mkdir(parents=True, exist_ok=True)
    except OSError as error:
        print(f"ui: the data folder {error.filename} cannot be made: {error.strerror}.", file=sys.stderr)
        return 2
    _prepare_kivy(data_folder / "kivy", without_window=chosen.pictures is not None)
    if chosen.pictures is not None:
        from ui.pictures import write_pictures

        return write_pictures(chosen.pictures)
    from ui.app import PlannerApp

    PlannerApp(data_folder=data_folder, case_file=chosen.case, demo=chosen.demo).run()
    return 0


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="python -m ui",
        description="Home-oxygen and altitude planner. Estimate only. Confirm with prescriber.",
    )
    parser.add_argument("case", nargs="?", type=Path, metavar="CASE.json", help="a case file to import and open")
    parser.add_argument("--demo", action="store_true", help="open on the demo case")
    parser.add_argument("--data", type=Path, metavar="FOLDER", help="where cases are kept (default: your data folder)")
    parser.add_argument(
        "--pictures", type=Path, metavar="FOLDER", help="write a picture of each screen of the demo case"
    )
    return parser


def _display_is_missing() -> bool:
    if not sys.platform.startswith("linux"):
        return False
    return not os.environ.get("DISPLAY") and not os.environ.get("WAYLAND_DISPLAY")


def _data_folder() -> Path:
    override = os.environ.get("PLANNER_DATA_DIR")
    if override:
        return Path(override)
    import platformdirs

    from planner.catalogue import APP_NAME

    return Path(platformdirs.user_data_dir(APP_NAME, appauthor=False))


def _prepare_kivy(home: Path, *, without_window: bool) -> None:
    """Settings that must stand before Kivy is imported: no files of its own, no patient's data in its logs."""
    os.environ["KIVY_NO_ARGS"] = "1"
    os.environ["KIVY_NO_FILELOG"] = "1"
    os.environ["KIVY_NO_CONFIG"] = "1"
    os.environ["KIVY_HOME"] = str(home)
    os.environ.setdefault("KIVY_LOG_MODE", "PYTHON")  # leaves the program's own logging and stderr alone
    for provider in ("CLIPBOARD", "IMAGE", "TEXT", "WINDOW"):
        os.environ.setdefault(f"KIVY_{provider}", "sdl2")
    if without_window:
        os.environ["SDL_VIDEODRIVER"] = "offscreen"
    # Kivy calls it critical when two X11 tools for the middle mouse button are not installed; nothing here needs them.
    logging.getLogger("kivy").addFilter(lambda record: not str(record.msg).startswith("Cutbuffer"))
    configure_window()


def configure_window() -> None:
    """Size and limits of the window. Edges are smoothed where they are drawn; sampling all of it costs half a frame."""
    from kivy.config import Config

    Config.set("graphics", "multisamples", "0")
    Config.set("graphics", "width", str(SIZE[0]))
    Config.set("graphics", "height", str(SIZE[1]))
    Config.set("graphics", "minimum_width", "320")
    Config.set("graphics", "minimum_height", "390")
    Config.set("input", "mouse", "mouse,disable_multitouch")
    Config.set("kivy", "exit_on_escape", "0")


if __name__ == "__main__":
    sys.exit(main())
