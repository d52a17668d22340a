"""The invented scenario that an empty data folder starts with."""
