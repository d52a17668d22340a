"""What lies under a path: elevation, water, cover.

Read mosaic.py (many rasters as one ground), then profile.py. Below them raster.py opens files, grid.py
places samples, blocks.py decodes and keeps them, voids.py and water.py look at them; above them stand
skyline.py, ground.py (bare ground) and relief.py.
"""
