"""Results to charts, one kind of chart a file; each is made only for the outputs that draw it."""
