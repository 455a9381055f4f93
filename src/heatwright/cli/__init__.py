"""cli: the commands; the only room that prints, reads configuration or exits."""
