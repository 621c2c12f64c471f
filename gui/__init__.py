"""The window of Tricline: Qt, OpenGL and nothing of physics."""
