"""Liquids whose properties follow from their temperature, one module each."""
