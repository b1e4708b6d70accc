"""design room."""
