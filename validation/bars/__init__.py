"""Whether the printed mesh errors are honest: how often the limit lies inside, and how wide they are."""
