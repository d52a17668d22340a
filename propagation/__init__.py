"""Published propagation models: arrays in, arrays out. Read free_space.py, diffraction.py, p1546/field.py."""
