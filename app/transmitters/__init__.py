"""Masts and what they radiate.

Read model.py, then store.py (over database.py, schema.py, rows.py, documents.py), then template.py
(over csv_text.py, cells.py, emission_row.py, misplaced.py).
"""
