"""From documents to integers: encoding, and what is measured on each document."""
