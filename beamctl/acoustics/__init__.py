"""Pure physics of sound in air and of panels of small transducers. Arrays in, arrays out."""
