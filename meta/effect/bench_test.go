package effect

import "testing"

func BenchmarkFromTable(b *testing.B) {
	table := Table{Events1: 62, Total1: 13598, Events2: 248, Total2: 12867}
	b.ReportAllocs()
	for b.Loop() {
		if _, _, err := FromTable(OddsRatio, table, Half); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkFromArms(b *testing.B) {
	treated, control := Arm{Mean: 12, SD: 3, N: 9}, Arm{Mean: 10, SD: 4, N: 25}
	b.ReportAllocs()
	for b.Loop() {
		if _, _, err := FromArms(StandardisedMeanDifference, treated, control); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkFisher(b *testing.B) {
	studies := []Signed{{1.5, 40}, {2.2, 100}, {-0.3, 60}, {40, 1000}}
	b.ReportAllocs()
	for b.Loop() {
		if _, _, err := Fisher(studies); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkFromFiveNumbers(b *testing.B) {
	b.ReportAllocs()
	for b.Loop() {
		if _, _, err := FromFiveNumbers(2, 8, 10, 16, 22, 25); err != nil {
			b.Fatal(err)
		}
	}
}
