"""What a run does, step by step, and where its work runs."""
