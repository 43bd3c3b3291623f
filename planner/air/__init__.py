"""The air: its pressure at an altitude, and the oxygen pressure that is breathed in."""
