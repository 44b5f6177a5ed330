"""Physics: numpy in, numpy out. The last axis is the traverse point; impossible input gives NaN."""
