"""Is an existing entry sound, and what would it be if it were: checks of thermo files, and mending."""
