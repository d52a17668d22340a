"""Masts and what they radiate. Read model.py, then store.py and template.py."""
