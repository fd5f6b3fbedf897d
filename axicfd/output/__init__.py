"""From a result to something outside: folder, tables, pictures. Computes nothing physical."""
