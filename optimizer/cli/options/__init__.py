"""What each command takes, one module a command; light to import, so that --help answers at once."""
