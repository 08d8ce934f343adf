"""What goes onto a target: images and patches of a model, vectors to check it with."""
