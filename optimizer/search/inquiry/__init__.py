"""One or two parts under question: their checks, what they reach, what stops them."""
