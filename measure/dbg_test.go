package measure
import ("testing";"fmt")
func TestDbg(t *testing.T){
	a:=testAnalyser(t)
	for _,s:=range []scene{{gain: 0.4, delay: 300.3, noise: 1e-4, seed: 2},{gain: 0.4, delay: 300.3, noise: 2e-3, seed: 2}, {gain: 0.4, delay: 300.3, noise: 1e-4, second: 0.02, seed: 2}, {gain: 0.4, delay: 300.3, noise: 2e-3, second: 0.02, seed: 2}}{
		for _,n:=range []int{0,256}{
		mic:=s.record(a.exc)
		at := a.exc.Begin + int(.5*float64(a.exc.End-a.exc.Begin))
		mic=losses["repeated"](mic,at,n)
		full:=a.dec.Impulse(mic)
		fmt.Println(s,n); 
		dbg=true
		fmt.Println(a.unexplained(mic,full,a.exc.Begin+300,a.exc.End+300,300))
		}
	}
}
