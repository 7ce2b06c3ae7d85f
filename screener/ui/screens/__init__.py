"""What fills the terminal: the run, and the pages beside it."""
