"""How one pump behaves: curves, similarity, suction, heating and liquids, on plain arrays in SI."""
