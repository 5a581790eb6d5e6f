"""Springs that can be bought: lists of them, and the search for the best."""
