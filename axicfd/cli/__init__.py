"""Arguments in, text and exit codes out. No physics and no defaults of the model live here."""
