"""Rec. ITU-R P.1812-7: loss over one path's own ground.

Read loss.py (the steps in their order), then path.py, climate.py, diffraction.py, troposcatter.py,
ducting.py, combination.py, locations.py. `basic_loss` is the entry; `path_terms` and `loss_of_path`
are its two halves, `stacked_paths` makes one batch of many paths.
"""

from propagation.p1812.loss import P1812Result, basic_loss, loss_of_path
from propagation.p1812.path import PathTerms, path_terms, stacked_paths

__all__ = ["P1812Result", "PathTerms", "basic_loss", "loss_of_path", "path_terms", "stacked_paths"]
