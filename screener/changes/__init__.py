"""What re-runs the pipeline with something changed."""
