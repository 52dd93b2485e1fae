"""Components of the flowpath: stream in, stream out."""
