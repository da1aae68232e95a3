"""The main road: a photograph and a recipe in, a map out."""

from sheenmap.measure.explain import Candidate, Explanation, explain
from sheenmap.measure.judging import judge_map, read_recipe_sites
from sheenmap.measure.measure import measure
from sheenmap.measure.result import BudgetLine, Measurement

__all__ = ["BudgetLine", "Candidate", "Explanation", "Measurement", "explain", "judge_map", "measure", "read_recipe_sites"]
