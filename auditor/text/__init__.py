"""What can be said of a text without a vocabulary: properties, words, whitespace, cuts."""
