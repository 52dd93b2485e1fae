"""Files and words that nobody writes by accident: what they hold, and the lines that the program says of them."""
