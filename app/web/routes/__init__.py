"""One file per group of addresses."""
