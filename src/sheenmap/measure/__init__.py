"""The main road: a photograph and a recipe in, a map out."""

from sheenmap.measure.result import BudgetLine, Measurement

__all__ = ["BudgetLine", "Measurement"]
