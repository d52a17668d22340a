"""Everything between the air and the sets. Read parts.py, then document.py."""
