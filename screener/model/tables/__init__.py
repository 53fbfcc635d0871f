"""Tables that standards lay down: motor sizes and acceptance grades."""
