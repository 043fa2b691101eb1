package runner

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"log"
	"net"
	"os"
	"path/filepath"
	"time"

	"github.com/go-zeromq/zmq4"
)

// client speaks with one kernel.
type client struct {
	key     []byte
	session string
	dir     string // of the connection file
	proc    *process
	shell   zmq4.Socket
	control zmq4.Socket
	in      chan received
	cancel  context.CancelFunc
}

type received struct {
	iopub bool
	message
}

const (
	portTries   = 3                // ports can be taken between being found and being used
	startLimit  = 30 * time.Second // for a kernel to answer
	infoEvery   = 200 * time.Millisecond
	messagesCap = 64
)

// ErrNoAnswer is a kernel that runs and does not answer, for half a minute.
var ErrNoAnswer = errors.New("the kernel does not answer")

// connect starts a kernel and waits until it answers on both channels.
func connect(ctx context.Context, o *Options) (*client, error) {
	var err error
	for range portTries {
		var c *client
		c, err = connectOnce(ctx, o)
		if err == nil {
			return c, nil
		}
		var died *DeathError
		if ctx.Err() != nil || !errors.As(err, &died) {
			break
		}
	}
	return nil, err
}

func connectOnce(ctx context.Context, o *Options) (*client, error) {
	c := &client{key: []byte(newID()), session: newID(), in: make(chan received, messagesCap)}
	ports, err := freePorts(5)
	if err != nil {
		return nil, err
	}
	file, err := c.writeConnection(ports)
	if err != nil {
		return nil, err
	}
	if c.proc, err = start(o.KernelPath, file, o.WorkDir, o.Env); err != nil {
		c.close()
		return nil, fmt.Errorf("the kernel cannot be started: %w", err)
	}
	if err := c.meet(ctx, ports); err != nil {
		c.close()
		return nil, err
	}
	return c, nil
}

// freePorts finds ports by listening on them and closing again.
func freePorts(n int) ([]int, error) {
	var ports []int
	for range n {
		l, err := net.Listen("tcp", "127.0.0.1:0")
		if err != nil {
			return nil, fmt.Errorf("no free port: %w", err)
		}
		defer l.Close()
		ports = append(ports, l.Addr().(*net.TCPAddr).Port)
	}
	return ports, nil
}

func (c *client) writeConnection(ports []int) (string, error) {
	dir, err := os.MkdirTemp("", "thinward-")
	if err != nil {
		return "", err
	}
	c.dir = dir
	text, err := json.Marshal(map[string]any{
		"ip": "127.0.0.1", "transport": "tcp", "signature_scheme": "hmac-sha256", "key": string(c.key),
		"shell_port": ports[0], "iopub_port": ports[1], "stdin_port": ports[2], "control_port": ports[3], "hb_port": ports[4],
	})
	if err != nil {
		return "", err
	}
	file := filepath.Join(dir, "connection.json")
	return file, os.WriteFile(file, text, 0o600)
}

// meet opens the channels and asks for the kernel's information until a status
// of ours was seen on iopub, which joins later than the others.
func (c *client) meet(ctx context.Context, ports []int) error {
	ctx, cancel := context.WithCancel(ctx)
	c.cancel = cancel
	go func() {
		select {
		case <-c.proc.done:
			cancel()
		case <-ctx.Done():
		}
	}()
	limit := time.NewTimer(startLimit)
	defer limit.Stop()
	opened := make(chan error, 1)
	// The sockets outlive a cancelled run: the interrupt goes through them.
	sockets, closeSockets := context.WithCancel(context.WithoutCancel(ctx))
	c.cancel = func() { cancel(); closeSockets() }
	go func() { opened <- c.dial(sockets, ports) }()
	select {
	case err := <-opened:
		if err != nil {
			return err
		}
	case <-ctx.Done():
		return c.why(ctx)
	case <-limit.C:
		return ErrNoAnswer
	}
	ask := time.NewTicker(infoEvery)
	defer ask.Stop()
	replied, status := false, false
	if err := c.send(c.shell, newID(), "kernel_info_request", map[string]any{}); err != nil {
		return err
	}
	for !replied || !status {
		select {
		case m := <-c.in:
			replied = replied || m.typ == "kernel_info_reply"
			status = status || m.iopub && m.typ == "status"
		case <-ask.C:
			if err := c.send(c.shell, newID(), "kernel_info_request", map[string]any{}); err != nil {
				return err
			}
		case <-ctx.Done():
			return c.why(ctx)
		case <-limit.C:
			return ErrNoAnswer
		}
	}
	return nil
}

// why says what ended the meeting: the kernel's death or the caller.
func (c *client) why(ctx context.Context) error {
	select {
	case <-c.proc.done:
		return &DeathError{State: c.proc.state(), Stderr: c.proc.tail.last()}
	default:
		return ctx.Err()
	}
}

func (c *client) dial(ctx context.Context, ports []int) error {
	quiet := log.New(io.Discard, "", 0)
	opts := []zmq4.Option{zmq4.WithDialerRetry(10 * time.Millisecond), zmq4.WithDialerMaxRetries(-1), zmq4.WithLogger(quiet)}
	iopub := zmq4.NewSub(ctx, opts...)
	c.shell = zmq4.NewDealer(ctx, opts...)
	c.control = zmq4.NewDealer(ctx, opts...)
	for _, s := range []struct {
		socket zmq4.Socket
		port   int
	}{{c.shell, ports[0]}, {iopub, ports[1]}, {c.control, ports[3]}} {
		if err := s.socket.Dial(fmt.Sprintf("tcp://127.0.0.1:%d", s.port)); err != nil {
			return err
		}
	}
	if err := iopub.SetOption(zmq4.OptionSubscribe, ""); err != nil {
		return err
	}
	go c.receive(ctx, c.shell, false)
	go c.receive(ctx, c.control, false)
	go c.receive(ctx, iopub, true)
	return nil
}

// receive passes messages on until the sockets are closed. What is not signed
// with our key is not from our kernel and is dropped.
func (c *client) receive(ctx context.Context, s zmq4.Socket, iopub bool) {
	defer s.Close()
	for {
		raw, err := s.Recv()
		if err != nil {
			return
		}
		m, err := parseFrames(c.key, raw.Frames)
		if err != nil {
			continue
		}
		select {
		case c.in <- received{iopub, m}:
		case <-ctx.Done():
			return
		}
	}
}

func (c *client) send(s zmq4.Socket, id, typ string, content any) error {
	parts, err := frames(c.key, c.session, id, typ, content)
	if err != nil {
		return err
	}
	return s.SendMulti(zmq4.NewMsgFrom(parts...))
}

// interrupt asks the kernel to stop the running cell. A kernel that cannot be
// asked is killed later.
func (c *client) interrupt() {
	_ = c.send(c.control, newID(), "interrupt_request", map[string]any{})
}

// close ends the kernel and removes what was written for it.
func (c *client) close() {
	if c.proc != nil {
		c.proc.end()
	}
	if c.cancel != nil {
		c.cancel()
	}
	_ = os.RemoveAll(c.dir)
}
