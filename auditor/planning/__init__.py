"""Planning on the lengths of documents: where to cut, what that costs, how to form batches."""
