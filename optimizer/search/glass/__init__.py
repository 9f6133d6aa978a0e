"""One candidate under the glass: what its curves, noise, levels and step are made of, part by part."""
