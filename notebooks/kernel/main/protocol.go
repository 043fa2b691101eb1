//go:build kernel

package main

import (
	"log"
	"os"
	"runtime"
	"time"

	interp "github.com/cosmos72/gomacro/fast"
	"github.com/go-zeromq/zmq4"

	"thinward/notebooks/kernel/host"
)

// replyKernelInfo stands in for sendKernelInfo: it names the highlighting that
// front ends and exporters look for.
func replyKernelInfo(receipt msgReceipt) error {
	return receipt.Reply("kernel_info_reply", kernelInfoContent())
}

func kernelInfoContent() map[string]interface{} {
	return map[string]interface{}{
		"status":                 "ok",
		"protocol_version":       ProtocolVersion,
		"implementation":         "thinward",
		"implementation_version": Version,
		"banner":                 "Go with the packages of Thinward, interpreted by gophernotes",
		"language_info": map[string]interface{}{
			"name":               "go",
			"version":            runtime.Version(),
			"mimetype":           "text/x-go",
			"file_extension":     ".go",
			"pygments_lexer":     "go",
			"codemirror_mode":    "text/x-go",
			"nbconvert_exporter": "script",
		},
		"help_links": []interface{}{},
	}
}

// handleCompleteRequest counts the cursor in characters, and answers with no
// matches rather than with an error.
func handleCompleteRequest(ir *interp.Interp, receipt msgReceipt) error {
	request, _ := receipt.Msg.Content.(map[string]interface{})
	code, _ := request["code"].(string)
	cursor, _ := request["cursor_pos"].(float64)
	at := host.ByteOffset(code, int(cursor))
	head, matches := completions(ir, code, at)
	start := host.CharOffset(code, len(head)-len(interp.TailIdentifier(head)))
	if matches == nil {
		matches, start = []string{}, int(cursor)
	}
	return receipt.Reply("complete_reply", map[string]interface{}{
		"status":       "ok",
		"matches":      matches,
		"cursor_start": start,
		"cursor_end":   int(cursor),
		"metadata":     map[string]interface{}{},
	})
}

func completions(ir *interp.Interp, code string, at int) (head string, matches []string) {
	defer func() {
		if recover() != nil {
			matches = nil
		}
	}()
	head, matches, _ = ir.CompleteWords(code, at)
	return head, matches
}

// answerOther replies to inspect requests, and to requests that front ends wait
// for and that there is nothing to say to.
func answerOther(receipt msgReceipt) error {
	if receipt.Msg.Header.MsgType == "inspect_request" {
		return replyInspect(receipt)
	}
	content, ok := emptyReplies[receipt.Msg.Header.MsgType]
	if !ok {
		return nil
	}
	return receipt.Reply(content.typ, content.body)
}

var emptyReplies = map[string]struct {
	typ  string
	body map[string]interface{}
}{
	"history_request":   {"history_reply", map[string]interface{}{"status": "ok", "history": []interface{}{}}},
	"comm_info_request": {"comm_info_reply", map[string]interface{}{"status": "ok", "comms": map[string]interface{}{}}},
}

// stopWindow is how long after a failure execute requests count as queued behind
// it. No reader is as quick.
const stopWindow = 100 * time.Millisecond

var stoppedAt time.Time // of the last failure of a cell that asked to stop the rest

// executeUnlessStopped runs a cell, or says that it was passed over because one
// before it failed: a front end that runs all cells sends all requests at once.
func (kernel *Kernel) executeUnlessStopped(receipt msgReceipt) error {
	if time.Since(stoppedAt) < stopWindow {
		return receipt.Reply("execute_reply", map[string]interface{}{"status": "aborted"})
	}
	return kernel.handleExecuteRequest(receipt)
}

// publishFailure stands in for PublishExecutionError: the failure has its name,
// its traceback and its detail, in the message and in the reply.
func publishFailure(receipt *msgReceipt, reply map[string]interface{}, err error) error {
	f, ok := err.(*host.Failure)
	if !ok {
		f = host.Describe(err, nil, false)
	}
	content := map[string]interface{}{
		"ename": f.Name, "evalue": f.Value, "traceback": f.Traceback, "thinward": f.Detail,
	}
	for k, v := range content {
		reply[k] = v
	}
	if request, _ := receipt.Msg.Content.(map[string]interface{}); request["stop_on_error"] == true {
		stoppedAt = time.Now()
	}
	return receipt.Publish("error", content)
}

// serveControl answers the control channel in its own goroutine, so that an
// interrupt is heard while a cell runs.
func serveControl(sockets SocketGroup) {
	for {
		m, err := sockets.ControlSocket.Socket.Recv()
		if err != nil {
			log.Println("control channel:", err)
			return
		}
		msg, ids, err := WireMsgToComposedMsg(m.Frames, sockets.Key)
		if err != nil {
			log.Println("control channel:", err)
			continue
		}
		answerControl(msgReceipt{msg, ids, sockets})
	}
}

func answerControl(receipt msgReceipt) {
	// A receipt replies on its shell socket; this one came by the other.
	back := receipt
	back.Sockets.ShellSocket = receipt.Sockets.ControlSocket
	publish := func(state string) {
		if err := receipt.PublishKernelStatus(state); err != nil {
			log.Println("status:", err)
		}
	}
	publish(kernelBusy)
	defer publish(kernelIdle)
	var err error
	switch receipt.Msg.Header.MsgType {
	case "interrupt_request":
		interruptCell()
		err = back.Reply("interrupt_reply", map[string]interface{}{"status": "ok"})
	case "shutdown_request":
		request, _ := receipt.Msg.Content.(map[string]interface{})
		restart, _ := request["restart"].(bool)
		err = back.Reply("shutdown_reply", map[string]interface{}{"status": "ok", "restart": restart})
		publish(kernelIdle)
		closeAll(receipt.Sockets)
		os.Exit(0)
	case "kernel_info_request":
		err = replyKernelInfo(back)
	default:
		err = answerOther(back)
	}
	if err != nil {
		log.Println("control channel:", err)
	}
}

func closeAll(sockets SocketGroup) {
	for _, s := range []zmq4.Socket{sockets.ControlSocket.Socket, sockets.IOPubSocket.Socket} {
		_ = s.Close()
	}
}
