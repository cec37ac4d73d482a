"""Pictures of a run: the scene with the strongest paths, a section through it, detector maps."""
