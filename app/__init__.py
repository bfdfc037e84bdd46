"""The app room."""
