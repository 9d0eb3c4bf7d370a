"""mixind."""
