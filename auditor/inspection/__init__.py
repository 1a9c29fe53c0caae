"""What a vocabulary is made of, and what is wrong with it: no corpus is needed."""
