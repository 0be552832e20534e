"""How far a number may be believed: error bars, where to refine, and whether the model holds."""
