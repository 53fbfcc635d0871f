"""The pipeline: a table and a case to candidates, states, findings, ranks."""
