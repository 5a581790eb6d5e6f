"""Springs of flat strip: constant-force strips, spiral springs, power springs."""
