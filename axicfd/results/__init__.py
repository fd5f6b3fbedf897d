"""What a solution means to an engineer: curves, headline quantities, ledger, cautions. Nothing here iterates."""
