//go:build linux && cgo && !noaudio

package portaudio

/*
#cgo LDFLAGS: -ldl
#include <dlfcn.h>
#include <stddef.h>

static void no_message(const char *message) { (void)message; }

static void no_alsa_message(const char *file, int line, const char *function, int err, const char *fmt, ...) {
	(void)file; (void)line; (void)function; (void)err; (void)fmt;
}

// The libraries are those that PortAudio has loaded, if it has: nothing new is
// linked against.
static void hush_libraries(void) {
	void (*alsa)(void *) = (void (*)(void *))dlsym(RTLD_DEFAULT, "snd_lib_error_set_handler");
	if (alsa != NULL) alsa((void *)no_alsa_message);
	void (*jack_error)(void *) = (void (*)(void *))dlsym(RTLD_DEFAULT, "jack_set_error_function");
	if (jack_error != NULL) jack_error((void *)no_message);
	void (*jack_info)(void *) = (void (*)(void *))dlsym(RTLD_DEFAULT, "jack_set_info_function");
	if (jack_info != NULL) jack_info((void *)no_message);
}
*/
import "C"

// quiet keeps ALSA and JACK from writing on stderr about every device that they do
// not find.
func quiet() { C.hush_libraries() }
