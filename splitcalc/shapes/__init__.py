"""What a beam section is: families, tables of published dimensions, and their properties."""
