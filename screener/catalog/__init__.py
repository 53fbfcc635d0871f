"""Pump catalogs: JSON files into entries, and entries into the table that is screened."""
