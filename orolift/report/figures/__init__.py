"""Figures: a result to a drawing in page coordinates; templates only write down what is here."""
