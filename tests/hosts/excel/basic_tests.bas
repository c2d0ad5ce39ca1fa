Rem Attribute VBA_ModuleType=VBAModule
Option VBASupport 1
Option Explicit

Private Function Told(v As Variant) As String
    If IsArray(v) Then
        Told = "array"
    ElseIf VarType(v) = 10 Then
        Told = "error"
    Else
        Told = VarType(v) & ":" & CStr(v)
    End If
End Function

Function BlockOfAnswers()
    Dim given(1, 1) As Variant, back As Variant, code As Long
    code = 2042
    given(0, 0) = 1.5
    given(0, 1) = code
    given(1, 0) = "#N/A"
    given(1, 1) = True
    back = axAnswer(given)
    BlockOfAnswers = Told(back(0, 0)) & " " & Told(back(0, 1)) & " " & Told(back(1, 0)) & " " & Told(back(1, 1))
End Function

Function RowOfAnswers()
    Dim given(1) As Variant, back As Variant, code As Long
    code = 2015
    given(0) = 2015.0
    given(1) = code
    back = axAnswer(given)
    RowOfAnswers = Told(back(0)) & " " & Told(back(1)) & " " & Told(axAnswer(code)) & " " & Told(axAnswer("text"))
End Function

Function Taken(given As Variant) As String
    Dim value As Variant, place As String
    place = axTake(value, given)
    If IsArray(value) Then
        Taken = place & " " & UBound(value, 1) & "x" & UBound(value, 2) & " " & Told(value(1, 1))
    Else
        Taken = place & " " & Told(value)
    End If
End Function

Function TakenBlock()
    TakenBlock = Taken(Range("B3:C5"))
End Function

Function TakenColumns()
    TakenColumns = Taken(Range("B:C"))
End Function

Function TakenRows()
    TakenRows = Taken(Range("3:4"))
End Function

Function TakenTallWithAnEnd()
    TakenTallWithAnEnd = Taken(Range("B1:B5000"))
End Function

Function TakenColumnsBesideTheUsed()
    TakenColumnsBesideTheUsed = Taken(Range("H:H"))
End Function

Function TakenCell()
    TakenCell = Taken(Range("B3"))
End Function

Function TakenText()
    TakenText = Taken("kN")
End Function

Function Command()
    Command = axCommand()
End Function

Function Called()
    Started = 0
    Refuse = False
    Called = AX_GRID(Range("B3:C5"), , "T1") & " / starts " & Started
End Function

Function CalledWithNoArguments()
    CalledWithNoArguments = AX_CLOCK()
End Function

Function CalledAgainAfterTheProcessEnded()
    Dim first As String
    Started = 0
    first = AX_GRID(Range("B3"))
    Lost = 1
    CalledAgainAfterTheProcessEnded = Told(AX_GRID(Range("B3"))) & " / starts " & Started
End Function

Function NotStarted()
    Dim n As Long, last As Variant
    axForget
    Refuse = True
    Started = 0
    For n = 1 To 5
        last = AX_GRID(Range("B3"))
    Next n
    NotStarted = Told(last) & " / starts " & Started & " / " & AX_ABOUT()
    Refuse = False
End Function
