"""writing: entries and tables as text, through plain-text templates."""
