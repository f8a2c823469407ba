"""The sections of the note, one file each: answers in, blocks of the document out."""
