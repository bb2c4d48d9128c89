package pyro

// Nodes and weights of the eight-point Gauss–Legendre rule on [−1, 1], half of each.
var (
	gauss8Nodes   = [4]float64{0.183434642495649805, 0.525532409916328986, 0.79666647741362674, 0.960289856497536232}
	gauss8Weights = [4]float64{0.362683783378361983, 0.313706645877887287, 0.222381034453374471, 0.101228536290376259}
)

// gauss8 returns node and weight k = 0 … 7 of the rule, nodes rising.
func gauss8(k int) (node, weight float64) {
	if k < 4 {
		return -gauss8Nodes[3-k], gauss8Weights[3-k]
	}
	return gauss8Nodes[k-4], gauss8Weights[k-4]
}
