"""Reading documents, naming the place of a problem in them, checking them, and writing files whole."""
