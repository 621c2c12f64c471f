"""The physics and the files of Tricline: numpy and scipy only, no Qt, no OpenGL."""
