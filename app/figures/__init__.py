"""Charts: described once, painted on the screen and into every kind of file."""
