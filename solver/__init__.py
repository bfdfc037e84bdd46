"""The solver room."""
