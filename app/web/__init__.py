"""The page and the API: translate and nothing more. Read main.py."""
