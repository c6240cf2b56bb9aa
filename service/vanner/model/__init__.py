"""The mathematics: arrays in, arrays out."""
