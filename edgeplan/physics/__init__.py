"""Formulas: arrays in, arrays out; no records, no files, no printing."""
