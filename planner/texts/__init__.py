"""Texts apart from code: whole sentences with named places for values, one catalogue a language."""

from planner.texts.catalogue import Texts, texts_for
from planner.texts.quantities import Quantities

__all__ = ["Quantities", "Texts", "texts_for"]
