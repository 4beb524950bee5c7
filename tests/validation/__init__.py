"""One file for each physical claim: a number from outside against what a user's result rests on."""
