"""Runs the chain once: the one place that knows the order of the rooms."""

from probsoil.assessment.results_folder import claimed_folder
from probsoil.assessment.run import Assessment, assess
from probsoil.assessment.sheet import Sheet, sheet

__all__ = ["Assessment", "Sheet", "assess", "claimed_folder", "sheet"]
