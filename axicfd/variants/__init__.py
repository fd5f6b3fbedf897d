"""Many solves of one tube: what changes, by how much, and how surely."""
