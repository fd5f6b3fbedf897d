"""Properties as functions of temperature, and the built-in fluids and solids."""
