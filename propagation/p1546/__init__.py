"""Rec. ITU-R P.1546-6. Read field.py (the steps), curves.py, corrections.py, then path.py."""

from propagation.p1546.field import P1546Result, field_strength

__all__ = ["P1546Result", "field_strength"]
