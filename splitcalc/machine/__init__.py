"""What a machine is: the document, its file, and the numbers that the core gets from it."""
