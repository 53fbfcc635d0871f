"""Parallel operation: branches, demand, the flow left for a new pump, operating points, turndown, match."""
