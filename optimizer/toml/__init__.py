"""TOML with its places: text and tables of a file, the line of each key, problems that name both."""
