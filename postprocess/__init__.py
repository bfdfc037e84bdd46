"""The postprocess room."""
