package fit

import (
	"math"
	"strings"
	"testing"
)

// A problem of the NIST Statistical Reference Datasets, nonlinear regression,
// https://www.itl.nist.gov/div898/strd/nls/nls_main.shtml. Data and certified
// values are typed from memory and checked by reproducing the certified
// residual sum of squares and standard deviations, to whose ten digits a wrong
// datum would not lead.
type nist struct {
	name      string
	model     func(x float64, b []float64) float64
	starts    [2][]float64 // NIST's far and near start
	certified []float64
	deviation []float64 // certified standard deviations of the parameters
	residual  float64   // certified residual sum of squares
	x, y      []float64
}

func evenly(from, step float64, n int) []float64 {
	x := make([]float64, n)
	for i := range x {
		x[i] = from + float64(i)*step
	}
	return x
}

var nistProblems = []nist{
	{
		name:      "Misra1a",
		model:     func(x float64, b []float64) float64 { return b[0] * (1 - math.Exp(-b[1]*x)) },
		starts:    [2][]float64{{500, 0.0001}, {250, 0.0005}},
		certified: []float64{2.3894212918e+02, 5.5015643181e-04},
		deviation: []float64{2.7070075241e+00, 7.2668688436e-06},
		residual:  1.2455138894e-01,
		x:         []float64{77.6, 114.9, 141.1, 190.8, 239.9, 289.0, 332.8, 378.4, 434.8, 477.3, 536.8, 593.1, 689.1, 760.0},
		y:         []float64{10.07, 14.73, 17.94, 23.93, 29.61, 35.18, 40.02, 44.82, 50.76, 55.05, 61.01, 66.40, 75.47, 81.78},
	},
	{
		name: "Lanczos3",
		model: func(x float64, b []float64) float64 {
			return b[0]*math.Exp(-b[1]*x) + b[2]*math.Exp(-b[3]*x) + b[4]*math.Exp(-b[5]*x)
		},
		starts:    [2][]float64{{1.2, 0.3, 5.6, 5.5, 6.5, 7.6}, {0.5, 0.7, 3.6, 4.2, 4, 6.3}},
		certified: []float64{8.6816414977e-02, 9.5498101505e-01, 8.4400777463e-01, 2.9515951832e+00, 1.5825685901e+00, 4.9863565084e+00},
		deviation: []float64{1.7197908859e-02, 9.7041624475e-02, 4.1488663282e-02, 1.0766312506e-01, 5.8371576281e-02, 3.4436403035e-02},
		residual:  1.6117193594e-08,
		x:         evenly(0, 0.05, 24),
		y: []float64{2.5134, 2.0443, 1.6684, 1.3664, 1.1232, 0.9269, 0.7679, 0.6389, 0.5338, 0.4479, 0.3776, 0.3197,
			0.2720, 0.2325, 0.1997, 0.1723, 0.1493, 0.1301, 0.1138, 0.1000, 0.0883, 0.0783, 0.0698, 0.0624},
	},
	{
		name: "MGH09",
		model: func(x float64, b []float64) float64 {
			return b[0] * (x*x + x*b[1]) / (x*x + x*b[2] + b[3])
		},
		starts:    [2][]float64{{25, 39, 41.5, 39}, {0.25, 0.39, 0.415, 0.39}},
		certified: []float64{1.9280693458e-01, 1.9128232873e-01, 1.2305650693e-01, 1.3606233068e-01},
		deviation: []float64{1.1435312227e-02, 1.9633220911e-01, 8.0842031232e-02, 9.0025542308e-02},
		residual:  3.0750560385e-04,
		x:         []float64{4, 2, 1, 0.5, 0.25, 0.167, 0.125, 0.1, 0.0833, 0.0714, 0.0625},
		y:         []float64{0.1957, 0.1947, 0.1735, 0.16, 0.0844, 0.0627, 0.0456, 0.0342, 0.0323, 0.0235, 0.0246},
	},
	{
		name:      "MGH10",
		model:     func(x float64, b []float64) float64 { return b[0] * math.Exp(b[1]/(x+b[2])) },
		starts:    [2][]float64{{2, 400000, 25000}, {0.02, 4000, 250}},
		certified: []float64{5.6096364710e-03, 6.1813463463e+03, 3.4522363462e+02},
		deviation: []float64{1.5687892471e-04, 2.3309021107e+01, 7.8486103508e-01},
		residual:  8.7945855171e+01,
		x:         evenly(50, 5, 16),
		y:         []float64{34780, 28610, 23650, 19630, 16370, 13720, 11540, 9744, 8261, 7030, 6005, 5147, 4427, 3820, 3307, 2872},
	},
	{
		name: "Thurber",
		model: func(x float64, b []float64) float64 {
			return (b[0] + x*(b[1]+x*(b[2]+x*b[3]))) / (1 + x*(b[4]+x*(b[5]+x*b[6])))
		},
		starts: [2][]float64{{1000, 1000, 400, 40, 0.7, 0.3, 0.03}, {1300, 1500, 500, 75, 1, 0.4, 0.05}},
		certified: []float64{1.2881396800e+03, 1.4910792535e+03, 5.8323836877e+02, 7.5416644291e+01,
			9.6629502864e-01, 3.9797285797e-01, 4.9727297349e-02},
		deviation: []float64{4.6647963344e+00, 3.9571156086e+01, 2.8698696102e+01, 5.5675370270e+00,
			3.1333340687e-02, 1.4984928198e-02, 6.5842344623e-03},
		residual: 5.6427082397e+03,
		x: []float64{-3.067, -2.981, -2.921, -2.912, -2.840, -2.797, -2.702, -2.699, -2.633, -2.481, -2.363, -2.322,
			-1.501, -1.460, -1.274, -1.212, -1.100, -1.046, -0.915, -0.714, -0.566, -0.545, -0.400, -0.309, -0.109, -0.103,
			0.010, 0.119, 0.377, 0.790, 0.963, 1.006, 1.115, 1.572, 1.841, 2.047, 2.200},
		y: []float64{80.574, 84.248, 87.264, 87.195, 89.076, 89.608, 89.868, 90.101, 92.405, 95.854, 100.696, 101.060,
			401.672, 390.724, 567.534, 635.316, 733.054, 759.087, 894.206, 990.785, 1090.109, 1080.914, 1122.643, 1178.351,
			1260.531, 1273.514, 1288.339, 1327.543, 1353.863, 1414.509, 1425.208, 1421.384, 1442.962, 1464.350, 1468.705,
			1447.894, 1457.628},
	},
	{
		name: "Eckerle4",
		model: func(x float64, b []float64) float64 {
			return b[0] / b[1] * math.Exp(-0.5*(x-b[2])*(x-b[2])/(b[1]*b[1]))
		},
		starts:    [2][]float64{{1, 10, 500}, {1.5, 5, 450}},
		certified: []float64{1.5543827178e+00, 4.0888321754e+00, 4.5154121844e+02},
		deviation: []float64{1.5408051163e-02, 4.6803020753e-02, 4.6800518816e-02},
		residual:  1.4635887487e-03,
		x: append(append(evenly(400, 5, 7), evenly(435, 1.5, 20)...),
			465, 470, 475, 480, 485, 490, 495, 500),
		y: []float64{0.0001575, 0.0001699, 0.0002350, 0.0003102, 0.0004917, 0.0008710, 0.0017418, 0.0046400, 0.0065895,
			0.0097302, 0.0149002, 0.0237310, 0.0401683, 0.0712559, 0.1264458, 0.2073413, 0.2902366, 0.3445623, 0.3698049,
			0.3668534, 0.3106727, 0.2078154, 0.1164354, 0.0616764, 0.0337200, 0.0194023, 0.0117831, 0.0074357, 0.0022732,
			0.0008800, 0.0004579, 0.0002345, 0.0001586, 0.0001143, 0.0000710},
	},
	{
		name: "Rat43",
		model: func(x float64, b []float64) float64 {
			return b[0] / math.Pow(1+math.Exp(b[1]-b[2]*x), 1/b[3])
		},
		starts:    [2][]float64{{100, 10, 1, 1}, {700, 5, 0.75, 1.3}},
		certified: []float64{6.9964151270e+02, 5.2771253025e+00, 7.5962938329e-01, 1.2792483859e+00},
		deviation: []float64{1.6302297817e+01, 2.0828735829e+00, 1.9566123451e-01, 6.8761936385e-01},
		residual:  8.7864049080e+03,
		x:         evenly(1, 1, 15),
		y: []float64{16.08, 33.83, 65.80, 97.20, 191.55, 326.20, 386.87, 520.53, 590.03, 651.92, 724.93, 699.56, 689.96,
			637.56, 717.41},
	},
}

func (q nist) problem(start []float64) Problem {
	return Problem{
		Residuals: func(dst, b []float64) {
			for i, x := range q.x {
				dst[i] = q.model(x, b) - q.y[i]
			}
		},
		Count: len(q.x),
		Start: start,
	}
}

func relative(got, want float64) float64 { return math.Abs(got/want - 1) }

func TestNIST(t *testing.T) {
	for _, q := range nistProblems {
		for i, start := range q.starts {
			t.Run(q.name+[]string{"/far", "/near"}[i], func(t *testing.T) {
				if len(q.x) != len(q.y) {
					t.Fatalf("%d x, %d y", len(q.x), len(q.y))
				}
				r, err := Solve(q.problem(start), Options{})
				if err != nil {
					t.Fatal(err)
				}
				t.Logf("%d iterations, %d evaluations, condition %.1e, %v", r.Iterations, r.Evaluations, r.Condition, r.Status)
				// Derivatives by differences leave some 1e-10 times the condition.
				if relative(r.ChiSquare, q.residual) > 1e-9 {
					t.Errorf("residual sum of squares %.10e, certified %.10e", r.ChiSquare, q.residual)
				}
				c := r.ScaledCovariance()
				for j := range q.certified {
					if relative(r.Params[j], q.certified[j]) > 1e-6 {
						t.Errorf("parameter %d: %.10e, certified %.10e", j, r.Params[j], q.certified[j])
					}
					if d := math.Sqrt(c.At(j, j)); relative(d, q.deviation[j]) > 1e-5 {
						t.Errorf("deviation %d: %.10e, certified %.10e", j, d, q.deviation[j])
					}
				}
				if r.DegreesOfFreedom != len(q.x)-len(start) {
					t.Errorf("%d degrees of freedom", r.DegreesOfFreedom)
				}
			})
		}
	}
}

// The tests above rest on the data being right, so a wrong digit must show.
func TestNISTNoticesAWrongDigit(t *testing.T) {
	q := nistProblems[0]
	if !strings.HasPrefix(q.name, "Misra") {
		t.Fatal(q.name)
	}
	q.y = append([]float64(nil), q.y...)
	q.y[6] += 0.001
	r, err := Solve(q.problem(q.starts[1]), Options{})
	if err != nil {
		t.Fatal(err)
	}
	if relative(r.ChiSquare, q.residual) < 1e-6 {
		t.Error("the certified sum came out of wrong data")
	}
}
