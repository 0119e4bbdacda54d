"""A laboratory file on its way in. The readers here are pure: bytes and text in, plain values and problems out."""
