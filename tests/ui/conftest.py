"""UI tests run without a display: SDL's offscreen driver, no user configuration, a fixed density."""

import os
import tempfile

os.environ["KIVY_NO_ARGS"] = "1"
os.environ["KIVY_NO_CONSOLELOG"] = "1"
os.environ["KIVY_NO_FILELOG"] = "1"
os.environ["KIVY_NO_CONFIG"] = "1"
os.environ["KIVY_METRICS_DENSITY"] = "1"
os.environ["KIVY_METRICS_FONTSCALE"] = "1"
os.environ["KIVY_HOME"] = tempfile.mkdtemp(prefix="kivy-")
os.environ["SDL_VIDEODRIVER"] = "offscreen"
for provider in ("CLIPBOARD", "IMAGE", "TEXT", "WINDOW"):
    os.environ.setdefault(f"KIVY_{provider}", "sdl2")

from kivy.config import Config  # noqa: E402

# Made once, larger than every size a test asks for: SDL's offscreen surface cannot grow later.
Config.set("graphics", "width", "1280")
Config.set("graphics", "height", "1280")
Config.set("graphics", "maxfps", "0")  # no sleeping between frames
