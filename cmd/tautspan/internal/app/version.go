package app

// Version is the program's version.
const Version = "0.1.0"
