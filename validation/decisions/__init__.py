"""Whether the right assumptions are found to matter."""
