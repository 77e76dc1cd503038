"""The only folder that imports matplotlib. Figures take plain arrays and words; they compute no physics."""
