"""Tables, pictures and files for people."""
