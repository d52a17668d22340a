"""What lies under a path: elevation, water, cover. Read mosaic.py, then profile.py."""
