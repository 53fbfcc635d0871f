"""The case: from a TOML or JSON file to `model.case.Case`, and the template to start one from."""
