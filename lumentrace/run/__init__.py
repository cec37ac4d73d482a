"""A traced study as labelled arrays with units and errors: made from sums, stored, opened."""
