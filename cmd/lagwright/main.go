// Command lagwright turns the log of a heater's bump test into a model with
// bounds, gains that hold for every plausible plant, and a replay of past runs.
package main

func main() {}
