"""What a designer asks for: the brief, how it is read, and how rates become steps."""
