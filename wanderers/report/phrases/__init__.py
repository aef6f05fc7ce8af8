"""Events and retrograde seasons as sentences to paste, in three lengths, in any language that has a file."""
