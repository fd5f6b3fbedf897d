"""What the engineer asked for, in words and numbers: read, checked, changed and written; no cells here."""
