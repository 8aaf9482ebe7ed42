"""The desk: the screen on which an antenna is designed, by keyboard, from 40x12 up."""
